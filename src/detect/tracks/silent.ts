/** Antennas that see noise without fringes: always, for a time, now and then, or in one hand only. */
import type { Polarization } from "../../dataset/dataset.ts";
import { EVERYTHING } from "../../dataset/selection.ts";
import { median } from "../../util/statistics.ts";
import type { DetectedEvent } from "../event.ts";
import type { Grid, Plane } from "./grid.ts";
import { type AntennaLevel, levelPoints, levelsByAntenna } from "./levels-by-antenna.ts";
import { clock, makeEvent, samplesOf, spanOf } from "./make-event.ts";

/** Expected power must be this far above its noise. */
const LEAST_EXPECTED = 20;
/** An antenna keeps no more than this power when silent. */
const SILENT_POWER = 0.03;
const FEWEST_ANTENNAS = 4;
/** Error of the power over the usual one at which silence for a time is clear. */
const CLEAR_ERROR = 0.08;
const LEAST_SIGNIFICANCE = 7;
/** Power over the usual one right before and after. */
const BACK_TO_NORMAL = 0.5;
const FEWEST_BASELINES = 2;

/** One antenna in one polarization, silent over some runs of integrations [start, end). */
interface Silence {
  readonly antenna: number;
  readonly polarization: Polarization;
  readonly runs: readonly (readonly [number, number])[];
  readonly power: number;
  readonly significance: number;
}

/** Samples of silence are taken out of the planes. */
export function silences(grid: Grid): DetectedEvent[] {
  if (grid.antennas.length < FEWEST_ANTENNAS) return [];
  const polarizations = [...new Set(grid.planes.map(({ polarization }) => polarization))];
  const found = polarizations.flatMap((polarization) => {
    const planes = grid.planes.filter((plane) => plane.polarization === polarization);
    return silencesOf(grid, polarization, planes);
  });
  for (const silence of found) takeOut(grid, silence);
  return grid.antennas.flatMap((_, antenna) => {
    const own = found.filter((silence) => silence.antenna === antenna);
    return merged(own, polarizations.length).map((group) => eventOf(grid, group, polarizations.length));
  });
}

function silencesOf(grid: Grid, polarization: Polarization, planes: readonly Plane[]): Silence[] {
  const silent = new Set<number>();
  const found: Silence[] = [];
  // A silent antenna is no measure for others: one after the other, and each without those found.
  const points = levelPoints(grid, planes);
  while (2 * (silent.size + 1) < grid.antennas.length) {
    const levels = levelsByAntenna(grid, points, silent);
    const typical = median(levels.filter((_, a) => !silent.has(a)).map(({ power }) => power));
    let worst = -1;
    for (const [a, level] of levels.entries()) {
      if (silent.has(a) || !isSilent(level, typical)) continue;
      if (worst < 0 || level.silent * level.expected > levels[worst]!.silent * levels[worst]!.expected)
        worst = a;
    }
    if (worst < 0) break;
    silent.add(worst);
    found.push({
      antenna: worst,
      polarization,
      runs: [[0, grid.times.length]],
      power: Math.max(0, levels[worst]!.power),
      significance: levels[worst]!.expected,
    });
  }
  return [...found, ...gapsOf(grid, polarization, planes, silent)];
}

function isSilent(level: AntennaLevel, typical: number): boolean {
  return (
    level.expected > LEAST_EXPECTED &&
    typical > 0.3 &&
    level.power < Math.max(SILENT_POWER, 3 * level.powerError) &&
    level.silent > 0.85 &&
    level.baselines >= FEWEST_BASELINES
  );
}

/** Silence for a time: against the antenna's own baselines at other times. */
function gapsOf(
  grid: Grid,
  polarization: Polarization,
  planes: readonly Plane[],
  skip: ReadonlySet<number>,
): Silence[] {
  const { times, antennas } = grid;
  const sums = powersInTime(grid, planes, skip);
  const found: Silence[] = [];
  const quality = antennas.map((_, a) =>
    median(Array.from({ length: times.length }, (_, t) => errorOf(sums, t * antennas.length + a))),
  );
  const width = widthFor(median(quality));
  if (width === 0) return [];
  const relative = smoothed(sums, grid, width);
  for (let a = 0; a < antennas.length; a++) {
    if (skip.has(a)) continue;
    const runs = runsOf(grid, relative, a, width).filter((run) => isAbrupt(grid, relative, a, run, width));
    const length = runs.reduce((sum, [start, end]) => sum + end - start, 0);
    if (length === 0) continue;
    const [start, end] = runs[0]!;
    const at = Math.floor((start + end) / 2) * antennas.length + a;
    found.push({
      antenna: a,
      polarization,
      runs,
      power: Math.max(0, relative.power[at]!),
      significance: (1 - relative.power[at]!) / relative.error[at]!,
    });
  }
  return found;
}

/** Fades of the sky come and go slowly; an antenna drops out from one integration to the next. */
function isAbrupt(
  grid: Grid,
  { power }: Relative,
  a: number,
  [start, end]: readonly [number, number],
  width: number,
): boolean {
  const segment = grid.segments.find((one) => start >= one.start && start < one.end)!;
  const last = grid.segments.find((one) => end > one.start && end <= one.end)!;
  const levelOf = (from: number, to: number) => {
    const values: number[] = [];
    for (let t = Math.max(from, 0); t < to; t++) values.push(power[t * grid.antennas.length + a]!);
    return median(values);
  };
  // The window that the power is summed over blurs an edge by its width.
  const before = levelOf(
    Math.max(segment.start, start - 2 * width),
    Math.max(segment.start, start - width + 1),
  );
  const after = levelOf(Math.min(last.end, end + width - 1), Math.min(last.end, end + 2 * width));
  return !(before < BACK_TO_NORMAL) && !(after < BACK_TO_NORMAL);
}

interface PowerSums {
  /** (times x antennas) sum over baselines of power times the usual one, and of the usual one squared, in noise units */
  readonly product: Float64Array;
  readonly square: Float64Array;
  /** (times x antennas) sum of the squares of each baseline's share in `square` */
  readonly fourth: Float64Array;
}

function powersInTime(grid: Grid, planes: readonly Plane[], skip: ReadonlySet<number>): PowerSums {
  const { times, antennas, baselines, first, second } = grid;
  const product = new Float64Array(times.length * antennas.length);
  const square = new Float64Array(times.length * antennas.length);
  const fourth = new Float64Array(times.length * antennas.length);
  for (const plane of planes) {
    for (let b = 0; b < baselines; b++) {
      if (skip.has(first[b]!) || skip.has(second[b]!)) continue;
      const power = (t: number) => {
        const i = t * baselines + b;
        return plane.real[i]! ** 2 + plane.imag[i]! ** 2 - 2 * plane.variance[i]!;
      };
      const usual = median(Array.from({ length: times.length }, (_, t) => power(t)));
      if (!(usual > 0)) continue;
      for (let t = 0; t < times.length; t++) {
        const now = power(t);
        const noise = (2 * plane.variance[t * baselines + b]!) ** 2;
        if (Number.isNaN(now) || !(noise > 0)) continue;
        // A bright moment must not outweigh many silent baselines.
        const gain = Math.min(now, 2 * usual);
        const trust = 1 / (noise + (0.1 * usual) ** 2);
        for (const a of [first[b]!, second[b]!]) {
          product[t * antennas.length + a]! += gain * usual * trust;
          square[t * antennas.length + a]! += usual * usual * trust;
          fourth[t * antennas.length + a]! += (usual * usual * trust) ** 2;
        }
      }
    }
  }
  return { product, square, fourth };
}

/** NaN where fewer baselines than these carry the sum: then it is theirs, not the antenna's. */
const FEWEST_EFFECTIVE = 2;

function errorOf({ square, fourth }: PowerSums, at: number): number {
  if (square[at]! ** 2 < FEWEST_EFFECTIVE * fourth[at]!) return Number.NaN;
  return square[at]! > 0 ? 1 / Math.sqrt(square[at]!) : Number.NaN;
}

/** Integrations to add up so that silence shows; 0: never. */
function widthFor(error: number): number {
  for (const width of [1, 2, 4, 8, 16]) if (error / Math.sqrt(width) < CLEAR_ERROR) return width;
  return 0;
}

interface Relative {
  readonly power: Float64Array;
  readonly error: Float64Array;
}

function smoothed(sums: PowerSums, grid: Grid, width: number): Relative {
  const antennas = grid.antennas.length;
  const power = new Float64Array(sums.product.length).fill(Number.NaN);
  const error = new Float64Array(sums.product.length).fill(Number.NaN);
  for (const { start, end } of grid.segments) {
    for (let t = start; t < end; t++) {
      const from = Math.max(start, Math.min(end - width, t - ((width - 1) >> 1)));
      for (let a = 0; a < antennas; a++) {
        let [product, square] = [0, 0];
        for (let s = from; s < Math.min(end, from + width); s++) {
          product += sums.product[s * antennas + a]!;
          square += sums.square[s * antennas + a]!;
        }
        if (!(square > 0) || Number.isNaN(errorOf(sums, t * antennas + a))) continue;
        power[t * antennas + a] = product / square;
        error[t * antennas + a] = 1 / Math.sqrt(square);
      }
    }
  }
  return { power, error };
}

function runsOf(grid: Grid, { power, error }: Relative, a: number, width: number): [number, number][] {
  const antennas = grid.antennas.length;
  const runs: [number, number][] = [];
  for (let t = 0; t < grid.times.length; t++) {
    const at = t * antennas + a;
    if (!(power[at]! < Math.min(0.3, Math.max(0.05, 3 * error[at]!)))) continue;
    if (!((1 - power[at]!) / error[at]! > LEAST_SIGNIFICANCE)) continue;
    const others = Array.from({ length: antennas }, (_, other) =>
      other === a ? Number.NaN : power[t * antennas + other]!,
    );
    if (!(median(others) > 0.5)) continue;
    const last = runs.at(-1);
    if (last !== undefined && t - last[1] < width) last[1] = t + 1;
    else runs.push([t, t + 1]);
  }
  return runs;
}

function takeOut(grid: Grid, silence: Silence): void {
  for (const plane of grid.planes) {
    if (plane.polarization !== silence.polarization) continue;
    for (const b of grid.touching[silence.antenna]!) {
      for (const [start, end] of silence.runs) {
        for (let t = start; t < end; t++) {
          const i = t * grid.baselines + b;
          plane.real[i] = Number.NaN;
          plane.imag[i] = Number.NaN;
          plane.variance[i] = Number.NaN;
          plane.slopeReal[i] = Number.NaN;
          plane.slopeImag[i] = Number.NaN;
        }
      }
    }
  }
}

/** Silences of all polarizations at the same times are one. */
function merged(own: readonly Silence[], polarizations: number): Silence[][] {
  if (polarizations === 1) return own.map((silence) => [silence]);
  const length = ({ runs }: Silence) => runs.reduce((sum, [start, end]) => sum + end - start, 0);
  const whole = own.length === polarizations;
  if (!whole) return own.map((silence) => [silence]);
  const [least, most] = [Math.min(...own.map(length)), Math.max(...own.map(length))];
  return least > 0.7 * most ? [[...own]] : own.map((silence) => [silence]);
}

function eventOf(grid: Grid, group: readonly Silence[], polarizations: number): DetectedEvent {
  const [silence] = group as [Silence];
  const { times } = grid;
  const antenna = grid.antennas[silence.antenna]!;
  const runs = group.length === 1 ? silence.runs : together(group.map(({ runs }) => runs));
  const oneHand = group.length < polarizations;
  const names = oneHand ? [silence.polarization] : null;
  const selection = (run: readonly [number, number]) => ({
    ...EVERYTHING,
    antennas: [antenna],
    polarizations: names,
    time: spanOf(grid, run[0], run[1]),
  });
  const [first] = runs as [readonly [number, number]];
  const length = runs.reduce((sum, [start, end]) => sum + end - start, 0);
  const share = length / times.length;
  const often = runs.length > 1;
  const whole = !often && first[0] === 0 && first[1] === times.length;
  const scope = often ? selection([first[0], runs.at(-1)![1]]) : selection(first);
  const others = runs.slice(1).map(selection);
  const outlying = [first, ...runs.slice(1)].reduce(
    (sum, run) => sum + samplesOf(grid.survey, selection(run)),
    0,
  );
  const power = Math.max(...group.map((one) => one.power));
  const when = whole
    ? "all the time"
    : often
      ? `in ${runs.length} stretches, ${(100 * share).toFixed(0)} % of the time`
      : `from ${clock(times[first[0]]!)} to ${clock(times[first[1] - 1]!)} UTC`;
  const event = makeEvent(grid, {
    kind: often ? "dropout" : oneHand ? "hand-off" : "silent-antenna",
    cause: "antenna",
    scope,
    flag: selection(first),
    ...(often ? { alsoFlag: others } : {}),
    size: often ? share : Math.sqrt(power),
    sizeError: Number.NaN,
    unit: often ? "fraction" : "ratio",
    significance: Math.max(...group.map((one) => one.significance)),
    evidence:
      `Antenna ${antenna}${oneHand ? ` shows no fringes in ${silence.polarization}` : " shows noise without fringes"} ${when}: ` +
      `on its baselines ${(100 * power).toFixed(1)} % of the power that ` +
      `${whole ? "the rest of the array makes likely" : "they have at other times"}.`,
  });
  return { ...event, outlying };
}

/** Union of runs. */
function together(lists: readonly (readonly (readonly [number, number])[])[]): [number, number][] {
  const sorted = lists.flat().sort((a, b) => a[0] - b[0]);
  const runs: [number, number][] = [];
  for (const [start, end] of sorted) {
    const last = runs.at(-1);
    if (last !== undefined && start <= last[1]) last[1] = Math.max(last[1], end);
    else runs.push([start, end]);
  }
  return runs;
}
