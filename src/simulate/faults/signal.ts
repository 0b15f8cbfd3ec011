/** Faults that multiply the signal, the noise or both of an antenna or a baseline by a complex factor. */
import { SECONDS_PER_DAY } from "../../util/constants.ts";
import type { Observation } from "../observation.ts";
import { handIndex } from "../products.ts";
import { Random } from "../random.ts";
import { productsWithSignal } from "../sky.ts";
import { STREAM } from "../streams.ts";
import type { CompiledFault, Effect, RowState } from "./effect.ts";
import type { FaultOf } from "./schema.ts";
import {
  antennaScope,
  coverage,
  keepProducts,
  marksAll,
  placeOf,
  type Scope,
  scopeOf,
  stationIndex,
} from "./scope.ts";

type AntennaFault = FaultOf<
  | "silent-antenna"
  | "weak-antenna"
  | "dropout"
  | "gain-step"
  | "hand-off"
  | "phase-jump"
  | "half-turn"
  | "delay-slope"
  | "phase-noise"
  | "noisy"
>;

/** What an antenna's signal is multiplied by; null in an integration that is not hit. */
type FactorAt = (time: number) => { readonly re: number; readonly im: number } | null;

interface Factor {
  readonly at: FactorAt;
  /** (channels) besides, of unit size: phase by channel */
  readonly turn: { readonly re: Float64Array; readonly im: Float64Array } | null;
  readonly size: number;
  readonly unit: string;
  /** what it multiplies */
  readonly of: { readonly signal: boolean; readonly noise: boolean };
}

const SIGNAL = { signal: true, noise: false };
const NOISE = { signal: false, noise: true };
const BOTH = { signal: true, noise: true };

const HALF_TURN = { re: -1, im: 0 };
const SILENT = { re: 0, im: 0 };
const DEGREE = Math.PI / 180;

function phasor(degrees: number): { re: number; im: number } {
  return { re: Math.cos(degrees * DEGREE), im: Math.sin(degrees * DEGREE) };
}

function factorOf(fault: AntennaFault, index: number, observation: Observation): Factor {
  const constant = (re: number, im: number, size: number, unit: string, of = SIGNAL): Factor => ({
    at: () => ({ re, im }),
    turn: null,
    size,
    unit,
    of,
  });
  switch (fault.kind) {
    case "silent-antenna":
    case "hand-off":
      return constant(0, 0, 0, "ratio");
    case "weak-antenna":
      return constant(fault.factor, 0, fault.factor, "ratio");
    case "gain-step":
      return constant(fault.factor, 0, fault.factor, "ratio", BOTH);
    case "noisy":
      return constant(fault.factor, 0, fault.factor, "ratio", NOISE);
    case "half-turn":
      return constant(HALF_TURN.re, HALF_TURN.im, 180, "deg");
    case "phase-jump": {
      const { re, im } = phasor(fault.degrees);
      return constant(re, im, fault.degrees, "deg");
    }
    case "delay-slope":
      return {
        ...constant(1, 0, fault.nanoseconds, "ns"),
        turn: delayTurn(fault.nanoseconds * 1e-9, observation),
      };
    case "phase-noise": {
      const degrees = Float64Array.from(
        observation.times,
        (_, time) => fault.degrees * Random.of(observation.scenario.seed, STREAM.fault, index, time).normal(),
      );
      return {
        at: (time) => phasor(degrees[time]!),
        turn: null,
        size: fault.degrees,
        unit: "deg",
        of: SIGNAL,
      };
    }
    case "dropout": {
      const stretch = fault.stretch ?? observation.integration;
      const silent = Uint8Array.from(observation.times, (mjd) => {
        const slot = Math.floor(((mjd - observation.start) * SECONDS_PER_DAY) / stretch);
        const drawn = Random.of(observation.scenario.seed, STREAM.fault, index, slot).uniform();
        return drawn < fault.share ? 1 : 0;
      });
      return {
        at: (time) => (silent[time] === 1 ? SILENT : null),
        turn: null,
        size: fault.share,
        unit: "fraction",
        of: SIGNAL,
      };
    }
  }
}

/** A delay's phase, 2 pi (nu - middle of the band) delay: none at the middle, where a calibration would put it. */
function delayTurn(seconds: number, observation: Observation): { re: Float64Array; im: Float64Array } {
  const phases = observation.setup.frequencies.map(
    (nu) => 2 * Math.PI * (nu - observation.bandCentre) * seconds,
  );
  return { re: phases.map(Math.cos), im: phases.map(Math.sin) };
}

export function compileAntennaFault(
  fault: AntennaFault,
  index: number,
  observation: Observation,
): CompiledFault {
  const place = placeOf(index);
  const station = stationIndex(observation, fault.antenna, place);
  const scope = antennaScope(fault, observation, place);
  const factor = factorOf(fault, index, observation);
  const { hand } = fault;
  const seen = productsWithSignal(observation);
  const ofHand = (end: "hand1" | "hand2") =>
    keepProducts(scope.samples, observation, (product, i) => {
      if (!factor.of.noise && !seen[i]) return false;
      return hand === undefined || product[end] === handIndex(hand);
    });
  return {
    kind: fault.kind,
    cause: "antenna",
    selection: scope.selection,
    size: factor.size,
    unit: factor.unit,
    spoils: "values",
    effect: antennaEffect(observation, station, scope, factor, [ofHand("hand1"), ofHand("hand2")]),
  };
}

function antennaEffect(
  observation: Observation,
  station: number,
  scope: Scope,
  factor: Factor,
  [asFirst, asSecond]: readonly [Int32Array, Int32Array],
): Effect {
  const { first, second } = observation;
  const polarizations = observation.shape.polarizations;
  const signal = (row: RowState): void => {
    const value = factor.at(row.time);
    if (value === null) return;
    // V = g1 conj(g2): the second antenna's factor enters conjugated.
    if (row.station1 === station) multiply(row, asFirst, value.re, value.im, factor.turn, 1, polarizations);
    if (row.station2 === station)
      multiply(row, asSecond, value.re, -value.im, factor.turn, -1, polarizations);
  };
  const noise = (row: RowState): void => {
    const value = factor.at(row.time);
    if (value === null) return;
    const size = Math.hypot(value.re, value.im);
    if (row.station1 === station) for (const sample of asFirst) row.noise[sample]! *= size;
    if (row.station2 === station) for (const sample of asSecond) row.noise[sample]! *= size;
  };
  return {
    stages: { ...(factor.of.signal ? { signal } : {}), ...(factor.of.noise ? { noise } : {}) },
    covers: coverage(scope),
    mark: (time, baseline, out, at) => {
      if (factor.at(time) === null) return;
      if (first[baseline] === station) for (const sample of asFirst) out[at + sample] = 1;
      if (second[baseline] === station) for (const sample of asSecond) out[at + sample] = 1;
    },
  };
}

function multiply(
  row: RowState,
  samples: Int32Array,
  re: number,
  im: number,
  turn: Factor["turn"],
  sense: 1 | -1,
  polarizations: number,
): void {
  const { signalRe, signalIm } = row;
  for (let k = 0; k < samples.length; k++) {
    const sample = samples[k]!;
    let fr = re;
    let fi = im;
    if (turn !== null) {
      const channel = Math.floor(sample / polarizations);
      const tr = turn.re[channel]!;
      const ti = sense * turn.im[channel]!;
      fr = re * tr - im * ti;
      fi = re * ti + im * tr;
    }
    const x = signalRe[sample]!;
    const y = signalIm[sample]!;
    signalRe[sample] = x * fr - y * fi;
    signalIm[sample] = x * fi + y * fr;
  }
}

/** A correlator's error on one baseline: closure phases and amplitudes show it, antennas do not explain it. */
export function compileBaselineFault(
  fault: FaultOf<"baseline-phase" | "baseline-gain">,
  index: number,
  observation: Observation,
): CompiledFault {
  const place = placeOf(index);
  const scope = scopeOf({ ...fault, baselines: [fault.baseline] }, observation, place);
  const seen = productsWithSignal(observation);
  const withNoise = fault.kind === "baseline-gain";
  const samples = keepProducts(scope.samples, observation, (_, i) => withNoise || seen[i]!);
  const { re, im } = fault.kind === "baseline-phase" ? phasor(fault.degrees) : { re: fault.factor, im: 0 };
  const from = stationIndex(observation, fault.baseline[0], place);
  const signal = (row: RowState): void => {
    const sense = row.station1 === from ? 1 : -1;
    multiply(row, samples, re, sense * im, null, 1, observation.shape.polarizations);
  };
  const noise = (row: RowState): void => {
    for (const sample of samples) row.noise[sample]! *= re;
  };
  return {
    kind: fault.kind,
    cause: "correlator",
    selection: scope.selection,
    size: fault.kind === "baseline-phase" ? fault.degrees : fault.factor,
    unit: fault.kind === "baseline-phase" ? "deg" : "ratio",
    spoils: "values",
    effect: {
      stages: withNoise ? { signal, noise } : { signal },
      covers: coverage(scope),
      mark: marksAll(samples),
    },
  };
}

/** R for L or X for Y on one antenna. */
export function compileExchange(
  fault: FaultOf<"exchanged-hands">,
  index: number,
  observation: Observation,
): CompiledFault {
  const place = placeOf(index);
  const station = stationIndex(observation, fault.antenna, place);
  const scope = antennaScope(fault, observation, place);
  // An empty sky looks the same through either hand.
  const samples = observation.scenario.sky.length > 0 ? scope.samples : new Int32Array(0);
  return {
    kind: fault.kind,
    cause: "antenna",
    selection: scope.selection,
    size: 1,
    unit: "exchange",
    spoils: "values",
    effect: {
      stages: {
        hands: (row) => {
          if (row.station1 === station) row.exchanged1 = !row.exchanged1;
          if (row.station2 === station) row.exchanged2 = !row.exchanged2;
        },
      },
      covers: coverage(scope),
      mark: marksAll(samples),
    },
  };
}
