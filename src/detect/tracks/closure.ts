/**
 * Errors of single baselines: what closure phases and amplitudes show and no antenna explains. A sky of more than a
 * point does not close either, so a baseline must stand out from all others, which then close to near nothing.
 */
import { median, robustSigma } from "../../util/statistics.ts";
import type { DetectedEvent } from "../event.ts";
import type { DetectRequest } from "../request.ts";
import { antennaGains } from "./antenna-gains.ts";
import { antennaPhases, LEAST_VARIANCE, wrap } from "./antenna-phases.ts";
import type { Grid, Plane } from "./grid.ts";
import { degrees, makeEvent } from "./make-event.ts";

const THRESHOLD = 8;
const STRETCHES = 8;
const LEAST_PHASE = (4 * Math.PI) / 180;
const LEAST_GAIN = 0.08;
const FEWEST_ANTENNAS = 5;
/** What closes to within this, on this share of the baselines and stretches, is a point source but for a few faults. */
const POINT_PHASE = 0.35;
const POINT_GAIN = 0.35;
const POINT_SHARE = 0.75;

/** Residuals by baseline and stretch of time, radians or logarithms; NaN unknown. */
interface Residuals {
  readonly phase: Float64Array;
  readonly gain: Float64Array;
  readonly error: Float64Array;
  readonly stretches: number;
}

export function closureFaults(grid: Grid, request: DetectRequest): DetectedEvent[] {
  if (grid.antennas.length < FEWEST_ANTENNAS) return [];
  const residuals = residualsOf(grid);
  // A sky that does not close would be taken for the correlator's fault.
  if (request.purpose !== "calibrator" && !looksLikeAPoint(residuals)) return [];
  const phases = outlying(grid, residuals, residuals.phase, LEAST_PHASE, request);
  const gains = outlying(grid, residuals, residuals.gain, LEAST_GAIN, request);
  const events = phases.map((one) => eventOf(grid, one, "deg"));
  for (const one of gains) {
    if (!phases.some(({ baseline }) => baseline === one.baseline)) events.push(eventOf(grid, one, "ratio"));
  }
  return events;
}

/** Nearly all baselines close, in phase and in amplitude, and none is without signal. */
function looksLikeAPoint({ phase, gain, stretches }: Residuals): boolean {
  const share = (values: Float64Array, limit: number) =>
    values.filter((x) => Math.abs(x) < limit).length / values.length;
  return stretches > 0 && share(phase, POINT_PHASE) > POINT_SHARE && share(gain, POINT_GAIN) > POINT_SHARE;
}

interface Outlier {
  readonly baseline: number;
  readonly value: number;
  readonly error: number;
  readonly z: number;
}

function outlying(
  grid: Grid,
  { error, stretches }: Residuals,
  values: Float64Array,
  least: number,
  { purpose }: DetectRequest,
): Outlier[] {
  const summary = Array.from({ length: grid.baselines }, (_, b) => {
    const own = values.subarray(b * stretches, (b + 1) * stretches).filter((x) => !Number.isNaN(x));
    const noise =
      median(error.subarray(b * stretches, (b + 1) * stretches)) / Math.sqrt(Math.max(1, own.length));
    return { value: median(own), noise, scatter: robustSigma(own), count: own.length };
  });
  const family = robustSigma(summary.map(({ value }) => value));
  const lengths = summary.map((_, b) => spacing(grid, b));
  const sorted = [...lengths].sort((x, y) => x - y);
  const short = sorted[Math.floor(0.1 * sorted.length)]!;
  return summary.flatMap(({ value, noise, scatter, count }, b) => {
    if (!(Math.abs(value) > least) || count === 0) return [];
    const scale = Math.max(purpose === "calibrator" ? 0 : family, noise, (1.25 * scatter) / Math.sqrt(count));
    const z = Math.abs(value) / scale;
    // Extended emission shows on the shortest spacings alone.
    if (z < THRESHOLD || (purpose !== "calibrator" && lengths[b]! < short)) return [];
    if (!(scatter < Math.abs(value) / 2)) return [];
    return [{ baseline: b, value, error: scale, z }];
  });
}

function spacing(grid: Grid, b: number): number {
  const { tracks } = grid.survey;
  const [first, last] = [tracks.firstCell[b]!, tracks.firstCell[b + 1]!];
  const middle = Math.floor((first + last) / 2);
  return middle < last ? Math.hypot(tracks.u[middle]!, tracks.v[middle]!) : Number.NaN;
}

function eventOf(grid: Grid, { baseline, value, error, z }: Outlier, unit: "deg" | "ratio"): DetectedEvent {
  const { antenna1, antenna2 } = grid.survey.baselines[baseline]!;
  const size = unit === "deg" ? degrees(value) : Math.exp(value);
  const sizeError = unit === "deg" ? degrees(error) : size * error;
  const what =
    unit === "deg"
      ? `${size.toFixed(1)} +- ${sizeError.toFixed(1)} deg in phase`
      : `a factor of ${size.toFixed(2)} +- ${sizeError.toFixed(2)} in amplitude`;
  return makeEvent(grid, {
    kind: "closure",
    cause: "correlator",
    scope: { baselines: [[antenna1, antenna2]] },
    size,
    sizeError,
    unit,
    significance: z,
    evidence: `Baseline ${antenna1}-${antenna2} is out by ${what}: its triangles do not close, those without it do, and no antenna explains it.`,
    repair: null,
  });
}

/** Medians over the products of what is left after antenna phases and gains. */
function residualsOf(grid: Grid): Residuals {
  const { times, baselines } = grid;
  const stretches = Math.max(1, Math.min(STRETCHES, Math.floor(times.length / 4)));
  const phases: number[][] = Array.from({ length: baselines * stretches }, () => []);
  const gains: number[][] = phases.map(() => []);
  const errors: number[][] = phases.map(() => []);
  for (let s = 0; s < stretches; s++) {
    const from = Math.floor((s * times.length) / stretches);
    const to = Math.floor(((s + 1) * times.length) / stretches);
    for (const plane of grid.planes) {
      const mean = means(grid, plane, from, to);
      const solved = antennaPhases(mean, grid.antennas.length);
      const gain = antennaGains(mean, grid.antennas.length);
      const left = mean.value.map((x, b) =>
        mean.weight[b]! > 0 ? x - gain.phase[mean.first[b]!]! - gain.phase[mean.second[b]!]! : Number.NaN,
      );
      const common = median(left);
      for (let b = 0; b < baselines; b++) {
        if (!(mean.weight[b]! > 0)) continue;
        const turned = solved.phase[mean.first[b]!]! - solved.phase[mean.second[b]!]!;
        phases[b * stretches + s]!.push(wrap(Math.atan2(mean.imag[b]!, mean.real[b]!) - turned));
        gains[b * stretches + s]!.push(left[b]! - common);
        errors[b * stretches + s]!.push(1 / Math.sqrt(mean.weight[b]!));
      }
    }
  }
  return {
    phase: Float64Array.from(phases, median),
    gain: Float64Array.from(gains, median),
    error: Float64Array.from(errors, (own) => median(own) / Math.sqrt(Math.max(1, own.length))),
    stretches,
  };
}

function means(grid: Grid, plane: Plane, from: number, to: number) {
  const { baselines, first, second } = grid;
  const column = () => new Float64Array(baselines);
  const [real, imag, weight, value] = [column(), column(), column(), column()];
  for (let b = 0; b < baselines; b++) {
    let [variance, n, amplitude] = [0, 0, 0];
    for (let t = from; t < to; t++) {
      const i = t * baselines + b;
      if (Number.isNaN(plane.real[i]!)) continue;
      real[b]! += plane.real[i]!;
      imag[b]! += plane.imag[i]!;
      variance += plane.variance[i]!;
      amplitude += plane.real[i]! ** 2 + plane.imag[i]! ** 2 - 2 * plane.variance[i]!;
      n += 1;
    }
    if (n === 0) continue;
    const power = real[b]! ** 2 + imag[b]! ** 2 - 2 * variance;
    if (!(power > 16 * variance) || !(amplitude > 0)) continue;
    weight[b] = 1 / Math.max(LEAST_VARIANCE, variance / power);
    value[b] = Math.log(amplitude / n) / 2;
  }
  return { first, second, real, imag, weight, value };
}
