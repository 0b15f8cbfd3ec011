/**
 * Interference: a transmitter on the horizon. Its delay between two antennas stays while the correlator follows the
 * sky, so its phase runs with w; its strength is given, and not lowered by that running.
 */

import { enuToLocal, localToGeocentric } from "../../geometry/earth.ts";
import { SPEED_OF_LIGHT } from "../../util/constants.ts";
import type { Observation } from "../observation.ts";
import type { Strength } from "../quantities.ts";
import { Random } from "../random.ts";
import { STREAM } from "../streams.ts";
import type { CompiledFault, Effect, RowState } from "./effect.ts";
import type { FaultOf } from "./schema.ts";
import { coverage, placeOf, type Scope, scopeOf } from "./scope.ts";

type Interference = FaultOf<"persistent-line" | "burst" | "drifting-line" | "lone-samples">;

const CAUSES = {
  "persistent-line": "channels",
  burst: "time",
  "drifting-line": "channels",
  "lone-samples": "samples",
} as const;

export function compileInterference(
  fault: Interference,
  index: number,
  observation: Observation,
): CompiledFault {
  const place = placeOf(index);
  const drifting = fault.kind === "drifting-line" ? fault : null;
  const channels = drifting === null ? fault.channels : [driftRange(drifting, observation.shape.channels)];
  const scope = scopeOf({ ...fault, channels }, observation, place);
  const places = placesOf(fault, index, observation, scope);
  return {
    kind: fault.kind,
    cause: CAUSES[fault.kind],
    selection: scope.selection,
    size: fault.amplitude.value,
    unit: fault.amplitude.unit,
    spoils: "values",
    effect: transmitter(fault.amplitude, index, observation, scope, places),
  };
}

/** The places of a row that are hit, as a list valid until the next call. */
type Places = (time: number, baseline: number) => { readonly list: Int32Array; readonly count: number };

function placesOf(fault: Interference, index: number, observation: Observation, scope: Scope): Places {
  const { samples, times } = scope;
  if (fault.kind === "drifting-line") {
    const first = times.indexOf(1);
    const last = times.lastIndexOf(1);
    const list = new Int32Array(samples.length);
    return (time) => {
      const along = last === first ? 0 : (time - first) / (last - first);
      const low = Math.round(fault.from_channel + (fault.to_channel - fault.from_channel) * along);
      let count = 0;
      for (const sample of samples) {
        const channel = Math.floor(sample / observation.shape.polarizations) % observation.shape.channels;
        if (channel >= low && channel < low + fault.width) list[count++] = sample;
      }
      return { list, count };
    };
  }
  if (fault.kind === "lone-samples") {
    const random = new Random();
    const list = new Int32Array(samples.length);
    return (time, baseline) => {
      random.restart(observation.scenario.seed, STREAM.fault, index, time, baseline);
      let count = 0;
      for (const sample of samples) if (random.uniform() < fault.share) list[count++] = sample;
      return { list, count };
    };
  }
  const all = { list: samples, count: samples.length };
  return () => all;
}

function driftRange(fault: FaultOf<"drifting-line">, channels: number): [number, number] {
  const low = Math.min(fault.from_channel, fault.to_channel);
  const high = Math.max(fault.from_channel, fault.to_channel) + fault.width - 1;
  return [low, Math.max(low, Math.min(high, Math.max(channels - 1, fault.from_channel, fault.to_channel)))];
}

function transmitter(
  amplitude: Strength,
  index: number,
  observation: Observation,
  scope: Scope,
  places: Places,
): Effect {
  const delays = horizonDelays(index, observation);
  const { setup, shape, first, second } = observation;
  const value = (row: RowState): void => {
    const { list, count } = places(row.time, row.baseline);
    const delay = delays[first[row.baseline]!]! - delays[second[row.baseline]!]! - row.actual.w;
    for (let k = 0; k < count; k++) {
      const sample = list[k]!;
      const nu = setup.frequencies[Math.floor(sample / shape.polarizations)]!;
      const size = amplitude.unit === "Jy" ? amplitude.value : amplitude.value * row.sigma[sample]!;
      const phase = -2 * Math.PI * nu * delay;
      row.valueRe[sample]! += size * Math.cos(phase);
      row.valueIm[sample]! += size * Math.sin(phase);
    }
  };
  return {
    stages: { value },
    covers: coverage(scope),
    mark: (time, baseline, out, at) => {
      const { list, count } = places(time, baseline);
      for (let k = 0; k < count; k++) out[at + list[k]!] = 1;
    },
  };
}

/** Delay of each antenna towards a point on the horizon, seconds. */
function horizonDelays(index: number, { scenario, stations }: Observation): Float64Array {
  const azimuth = 2 * Math.PI * Random.of(scenario.seed, STREAM.fault, index, -1).uniform();
  const local = enuToLocal([Math.sin(azimuth), Math.cos(azimuth), 0], scenario.array.latitude);
  const direction = localToGeocentric(local, scenario.array.longitude);
  return Float64Array.from(
    stations,
    ({ actual }) =>
      (actual[0] * direction[0] + actual[1] * direction[1] + actual[2] * direction[2]) / SPEED_OF_LIGHT,
  );
}
