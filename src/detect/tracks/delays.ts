/** Delays of antennas: phase slopes along the band that one antenna has, for a time or throughout. */
import { median, robustSigma } from "../../util/statistics.ts";
import type { DetectedEvent } from "../event.ts";
import { antennaPhases, LEAST_VARIANCE } from "./antenna-phases.ts";
import { findSteps } from "./find-steps.ts";
import type { Grid } from "./grid.ts";
import { clock, makeEvent, productsOf, spanOf } from "./make-event.ts";
import { intervalsOf, scopeOf } from "./phase-jumps.ts";
import { phaseStep, type Series } from "./step-search.ts";

const THRESHOLD = 10;
/** Phase across the band that is worth telling, degrees. */
const LEAST_ACROSS = 10;
const LEAST_ACROSS_STATIC = 30;

export function delaySlopes(grid: Grid): DetectedEvent[] {
  const { channels } = grid.survey.dataset.shape;
  if (channels < 2) return [];
  const series = grid.planes.map((plane) => slopeSeries(plane));
  const stepping = findSteps(grid, series, {
    threshold: THRESHOLD,
    least: (LEAST_ACROSS * Math.PI) / 180 / channels,
    skip: new Set(),
    solve: phaseStep,
    gains: false,
  });
  const events = intervalsOf(stepping).map(({ step, back }) => {
    const phase = back === null ? step.phase : (step.phase - back.phase) / 2;
    const error = back === null ? step.error : Math.hypot(step.error, back.error) / 2;
    const end = back?.at ?? grid.times.length;
    return eventOf(grid, {
      antenna: step.antenna,
      phase,
      error,
      series: step.series,
      significance: step.significance,
      run: [step.at, end],
      flagBefore: back === null && step.at < grid.times.length - step.at,
    });
  });
  const named = new Set(stepping.map(({ antenna }) => antenna));
  return [...events, ...throughout(grid, series, named)];
}

interface Slope {
  readonly antenna: number;
  /** radians a channel */
  readonly phase: number;
  readonly error: number;
  readonly series: readonly number[];
  readonly significance: number;
  readonly run: readonly [number, number];
  readonly flagBefore: boolean;
}

function slopeSeries(plane: Grid["planes"][number]): Series {
  const variance = plane.variance.map((mean, i) => {
    const n = plane.usable[i]!;
    const sample = mean * n;
    const power = Math.max(0, plane.real[i]! ** 2 + plane.imag[i]! ** 2);
    // Of a sum of V(c+1) V*(c), the noise of inner channels cancels to first order.
    return 2 * power * sample + 2 * n * sample * sample;
  });
  const missing = slopeless(plane);
  return {
    subband: plane.subband,
    product: plane.product,
    real: plane.slopeReal.map((value, i) => (missing(i) ? Number.NaN : value)),
    imag: plane.slopeImag.map((value, i) => (missing(i) ? Number.NaN : value)),
    variance,
  };
}

/** A cell with one usable channel has no slope. */
function slopeless(plane: Grid["planes"][number]): (i: number) => boolean {
  return (i) => !(plane.usable[i]! > 1) || Number.isNaN(plane.real[i]!);
}

function eventOf(grid: Grid, slope: Slope): DetectedEvent {
  const { times, antennas } = grid;
  const step = channelStep(grid, slope.series);
  const few = antennas.length < 3;
  // Two antennas share what their baseline shows.
  const share = few ? (slope.antenna === 0 ? 2 : -2) : 1;
  const size = ((share * slope.phase) / (2 * Math.PI * step)) * 1e9;
  const error = Math.abs(((share * slope.error) / (2 * Math.PI * step)) * 1e9);
  const [start, end] = slope.run;
  const scope = {
    ...scopeOf(grid, slope.antenna),
    ...productsOf(grid, slope.series),
    time: spanOf(grid, start, end),
  };
  const who = few ? "the baseline" : `antenna ${antennas[slope.antenna]!}`;
  const when =
    scope.time === null ? "throughout" : `from ${clock(times[start]!)} to ${clock(times[end - 1]!)} UTC`;
  const across = ((share * slope.phase * 180) / Math.PI) * grid.survey.dataset.shape.channels;
  return makeEvent(grid, {
    kind: "delay-slope",
    cause: few ? "baseline" : "antenna",
    scope,
    flag: slope.flagBefore ? { ...scope, time: spanOf(grid, 0, start) } : scope,
    size,
    sizeError: error,
    unit: "ns",
    significance: slope.significance,
    evidence:
      `The phase of ${who} slopes along the band ${when} as by a delay of ${size.toFixed(2)} +- ${error.toFixed(2)} ns` +
      `: ${across.toFixed(0)} deg over a sub-band, ${slope.significance.toFixed(1)} sigma out of family.`,
    repair: `take a delay of ${size.toFixed(2)} ns off ${who} ${when}`,
  });
}

/** Signed, Hz from one channel to the next. */
function channelStep(grid: Grid, which: readonly number[]): number {
  const { tracks, dataset } = grid.survey;
  const { setups, shape } = dataset;
  const { frequencies } = setups[tracks.setup[0] ?? 0]!;
  const subband = which.length === 0 ? 0 : grid.planes[which[0]!]!.subband;
  return frequencies[subband * shape.channels + 1]! - frequencies[subband * shape.channels]!;
}

/** One antenna out of family all the time. */
function throughout(grid: Grid, series: readonly Series[], named: ReadonlySet<number>): DetectedEvent[] {
  const { antennas, baselines } = grid;
  if (antennas.length < 4) return [];
  const real = new Float64Array(baselines);
  const imag = new Float64Array(baselines);
  const weight = new Float64Array(baselines);
  for (let b = 0; b < baselines; b++) {
    let variance = 0;
    for (const one of series) {
      for (let i = b; i < one.real.length; i += baselines) {
        if (Number.isNaN(one.real[i]!)) continue;
        real[b]! += one.real[i]!;
        imag[b]! += one.imag[i]!;
        variance += one.variance[i]!;
      }
    }
    const power = real[b]! ** 2 + imag[b]! ** 2 - variance;
    weight[b] = power > 0 && variance > 0 ? 1 / Math.max(LEAST_VARIANCE, variance / power) : 0;
  }
  const { phase, error, agreement } = antennaPhases(
    { first: grid.first, second: grid.second, real, imag, weight },
    antennas.length,
  );
  const least = (LEAST_ACROSS_STATIC * Math.PI) / 180 / grid.survey.dataset.shape.channels;
  return antennas.flatMap((_, a) => {
    if (named.has(a) || !(Math.abs(phase[a]!) > least) || agreement[a]! < 0.7) return [];
    const others = phase.filter((_, other) => other !== a && !named.has(other));
    const family = robustSigma(others);
    const scale = Math.max(family, error[a]!);
    const significance = Math.abs(phase[a]! - median(others)) / scale;
    if (significance < 10) return [];
    return [
      eventOf(grid, {
        antenna: a,
        phase: phase[a]! - median(others),
        error: scale,
        series: grid.planes.map((_, i) => i),
        significance,
        run: [0, grid.times.length],
        flagBefore: false,
      }),
    ];
  });
}
