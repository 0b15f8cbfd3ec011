/** The steps of antenna phases that are out of family, one by one, the most significant first. */

import { median } from "../../util/statistics.ts";
import { wrap } from "./antenna-phases.ts";
import type { Grid } from "./grid.ts";
import {
  fillSteps,
  localSignificance,
  type Series,
  type Solver,
  type Steps,
  sidesOf,
  significanceOf,
  stepsOf,
  WINDOWS,
} from "./step-search.ts";

export interface FoundStep {
  /** index into Grid.antennas */
  readonly antenna: number;
  /** first integration after the step */
  readonly at: number;
  /** radians, after minus before */
  readonly phase: number;
  readonly error: number;
  readonly significance: number;
  /** indices into the series that step */
  readonly series: readonly number[];
  /** integrations on either side that its size was measured over */
  readonly window: number;
}

export interface StepSettings {
  /** sigmas a step must be out of family */
  readonly threshold: number;
  /** radians that are worth telling */
  readonly least: number;
  readonly skip: ReadonlySet<number>;
  readonly solve: Solver;
  /** the steps are logarithms of gains rather than phases */
  readonly gains: boolean;
}

const MOST_STEPS = 24;
/** What is left of a step once it is measured thoroughly must still stand out. */
const LEAST_SIGMAS = 4;
/** Of the threshold: the few instants around tell their scale less well. */
const LOCAL_SHARE = 0.75;
/** From scan to scan, where the sky and the air have moved on meanwhile. */
const ACROSS_WINDOWS: readonly number[] = [1, 4, 16];
const ACROSS_THRESHOLD = 10;
/** The step must be shared by this much of the weight of the antenna's baselines. */
const LEAST_AGREEMENT = 0.6;

interface Group {
  readonly members: readonly number[];
  readonly windows: readonly Steps[];
}

/** @param series are turned back at the steps found */
export function findSteps(grid: Grid, series: readonly Series[], settings: StepSettings): FoundStep[] {
  const longest = Math.max(0, ...grid.segments.map(({ start, end }) => (end - start) / 2));
  const windows = WINDOWS.filter((window) => window <= longest);
  const groups: Group[] = groupsOf(series).map((members) => ({
    members,
    windows: [
      ...windows.map((window) => ({ window, across: false })),
      ...ACROSS_WINDOWS.map((window) => ({ window, across: true })),
    ].map(({ window, across }) =>
      stepsOf(
        grid,
        members.map((i) => series[i]!),
        window,
        settings.solve,
        across,
      ),
    ),
  }));
  for (const { windows: own } of groups) widenAcross(own);
  const found: FoundStep[] = [];
  for (let tries = 0; found.length < MOST_STEPS && tries < 4 * MOST_STEPS; tries++) {
    const best = strongest(grid, groups, settings);
    if (best === null) break;
    const step = settle(grid, series, groups, best, settings);
    if (
      !isSharp(grid, groups[best.group]!, step) ||
      repeats(found, step) ||
      !(Math.abs(step.phase) >= Math.max(settings.least, LEAST_SIGMAS * step.error))
    ) {
      passOver(grid, groups, best);
      continue;
    }
    found.push(step);
    turnBack(grid, series, step, settings.gains);
    for (const group of groups) {
      const members = group.members.map((i) => series[i]!);
      for (const steps of group.windows) {
        fillSteps(grid, members, steps, settings.solve, [step.at - steps.window, step.at + steps.window + 1]);
      }
    }
  }
  return found.length < 2 ? found : found.map((step) => remeasured(grid, series, settings, step));
}

/** Its size once no other step lies in its windows; the series keep it turned back by the new one. */
function remeasured(
  grid: Grid,
  series: readonly Series[],
  settings: StepSettings,
  step: FoundStep,
): FoundStep {
  turnBack(grid, series, { ...step, phase: -step.phase }, settings.gains);
  const [left, right] = sidesOf(grid, step.at, step.window)!;
  const some = step.series.map((i) => series[i]!);
  const phase = settings.solve(grid, some, left, right, true).phase[step.antenna]!;
  const better = Number.isNaN(phase) ? step : { ...step, phase };
  turnBack(grid, series, better, settings.gains);
  return better;
}

/** Steps across scans are few: an antenna that wanders more within scans does so from scan to scan. */
function widenAcross(windows: readonly Steps[]): void {
  const within = windows.filter(({ across }) => !across).at(-1);
  if (within === undefined) return;
  const typical = median(within.scale);
  for (const steps of windows) {
    if (!steps.across) continue;
    for (let a = 0; a < steps.scale.length; a++) {
      const ratio = within.scale[a]! / typical;
      if (ratio > 1) steps.scale[a]! *= ratio;
    }
  }
}

/** All, each polarization, each sub-band, each alone: without repeats. */
function groupsOf(series: readonly Series[]): number[][] {
  const groups = new Map<string, number[]>();
  const add = (members: number[]) => groups.set(members.join(" "), members);
  const indices = series.map((_, i) => i);
  add(indices);
  for (const { product } of series) add(indices.filter((i) => series[i]!.product === product));
  for (const { subband } of series) add(indices.filter((i) => series[i]!.subband === subband));
  if (series.length <= 8) for (const i of indices) add([i]);
  return [...groups.values()].filter((members) => members.length > 0);
}

interface Candidate {
  readonly group: number;
  readonly window: number;
  readonly at: number;
  readonly antenna: number;
  readonly significance: number;
}

function strongest(grid: Grid, groups: readonly Group[], settings: StepSettings): Candidate | null {
  const antennas = grid.antennas.length;
  let best: Candidate | null = null;
  for (let g = 0; g < groups.length; g++) {
    const { windows } = groups[g]!;
    for (let w = 0; w < windows.length; w++) {
      const steps = windows[w]!;
      for (let i = 0; i < steps.phase.length; i++) {
        if (!(Math.abs(steps.phase[i]!) >= settings.least)) continue;
        const antenna = i % antennas;
        const at = (i - antenna) / antennas;
        const significance = significanceOf(steps, antennas, at, antenna);
        if (significance < settings.threshold || significance <= (best?.significance ?? 0)) continue;
        if (steps.barred[i] === 1 || settings.skip.has(antenna) || steps.agreement[i]! < LEAST_AGREEMENT)
          continue;
        if (steps.across && significance < ACROSS_THRESHOLD) continue;
        if (localSignificance(steps, antennas, at, antenna) < LOCAL_SHARE * settings.threshold) continue;
        best = { group: g, window: w, at, antenna, significance };
      }
    }
  }
  return best;
}

/** A step is there at once; wander and a changing sky take their time. */
function isSharp(grid: Grid, { windows }: Group, step: FoundStep): boolean {
  const antennas = grid.antennas.length;
  for (const steps of windows) {
    const at = step.at * antennas + step.antenna;
    if (steps.across || !(steps.error[at]! < Math.abs(step.phase) / 5)) continue;
    return Math.abs(wrap(steps.phase[at]! - step.phase)) < Math.abs(step.phase) / 2;
  }
  return true;
}

function repeats(found: readonly FoundStep[], step: FoundStep): boolean {
  return found.some(
    (other) =>
      other.antenna === step.antenna &&
      other.at === step.at &&
      other.series.some((i) => step.series.includes(i)),
  );
}

/** No longer a candidate: all that its windows hold of this antenna. */
function passOver(grid: Grid, groups: readonly Group[], { antenna, at, group, window }: Candidate): void {
  const antennas = grid.antennas.length;
  const reach = groups[group]!.windows[window]!.window;
  for (const { windows } of groups) {
    for (const steps of windows) {
      if (steps.window < reach) continue;
      for (let t = Math.max(0, at - reach); t <= Math.min(grid.times.length - 1, at + reach); t++) {
        steps.barred[t * antennas + antenna] = 1;
      }
    }
  }
}

/** Exact time, series concerned, size and error. */
function settle(
  grid: Grid,
  series: readonly Series[],
  groups: readonly Group[],
  best: Candidate,
  settings: StepSettings,
): FoundStep {
  const { members, windows } = groups[best.group]!;
  const chosen = windows[best.window]!;
  const all = members.map((i) => series[i]!);
  if (!chosen.across) {
    for (const steps of windows) {
      if (steps.window > chosen.window || steps.across) continue;
      const around = [best.at - chosen.window, best.at + chosen.window + 1] as const;
      fillSteps(grid, all, steps, settings.solve, around, true);
    }
  }
  const rough = chosen.across ? { at: best.at, window: 1 } : sharpest(grid, windows, best);
  const at =
    rough.window === 1 ? rough.at : likeliest(grid, all, settings, best.antenna, rough.at, chosen.window);
  const [left, right] = sidesOf(grid, at, chosen.window)!;
  const measure = (which: readonly number[]) => {
    const some = which.map((i) => series[i]!);
    const solved = settings.solve(grid, some, left, right, true);
    return { phase: solved.phase[best.antenna]!, error: solved.error[best.antenna]! };
  };
  const which = stepping(series.length, members, measure);
  const { phase, error } = measure(which);
  const scale = Math.max(chosen.scale[best.antenna]!, error);
  return {
    antenna: best.antenna,
    at,
    phase,
    error: scale,
    significance: best.significance,
    series: which,
    window: chosen.window,
  };
}

/** Which of the series step: those on the side of the clearest one rather than on that of none. */
function stepping(
  count: number,
  members: readonly number[],
  measure: (which: readonly number[]) => { phase: number; error: number },
): readonly number[] {
  const each = Array.from({ length: count }, (_, i) => measure([i]));
  let clearest = measure(members);
  for (const i of members) {
    const one = each[i]!;
    if (Math.abs(one.phase) > 5 * one.error && Math.abs(one.phase) > 1.5 * Math.abs(clearest.phase))
      clearest = one;
  }
  const which = each.flatMap(({ phase, error }, i) => {
    if (Number.isNaN(phase)) return [];
    const tells = error < Math.abs(clearest.phase) / 4;
    // A series too noisy to tell goes with those that it was found with.
    if (!tells) return members.includes(i) ? [i] : [];
    return Math.abs(wrap(phase - clearest.phase)) < Math.abs(clearest.phase) / 2 ? [i] : [];
  });
  return which.length === 0 ? members : which;
}

/** The instant, by the shortest window that shows the step clearly. */
function sharpest(
  grid: Grid,
  windows: readonly Steps[],
  best: Candidate,
): { readonly at: number; readonly window: number } {
  const antennas = grid.antennas.length;
  const reach = windows[best.window]!.window;
  const sense = Math.sign(windows[best.window]!.phase[best.at * antennas + best.antenna]!);
  for (const steps of windows) {
    if (steps.window > reach || steps.across) continue;
    let at = -1;
    let most = 5;
    for (let t = Math.max(1, best.at - reach); t <= Math.min(grid.times.length - 1, best.at + reach); t++) {
      const phase = steps.phase[t * antennas + best.antenna]!;
      const significance = significanceOf(steps, antennas, t, best.antenna);
      const same = Math.sign(phase) === sense || Math.abs(phase) > 2.6;
      if (same && significance > most) [at, most] = [t, significance];
    }
    if (at >= 0) return { at, window: steps.window };
  }
  return { at: best.at, window: reach };
}

/** The instant at which two levels fit the antenna's integrations best, where no single integration shows the step. */
function likeliest(
  grid: Grid,
  series: readonly Series[],
  settings: StepSettings,
  antenna: number,
  at: number,
  window: number,
): number {
  const segment = grid.segments.find(({ start, end }) => at > start && at < end);
  if (segment === undefined) return at;
  const [from, to] = [Math.max(segment.start, at - window), Math.min(segment.end, at + window)];
  const left = [from, at] as const;
  const levels: number[] = [];
  const weights: number[] = [];
  for (let t = from; t < to; t++) {
    const solved = settings.solve(grid, series, left, [t, t + 1]);
    levels.push(solved.phase[antenna]!);
    weights.push(1 / solved.error[antenna]! ** 2);
  }
  let best = at;
  let most = 0;
  for (let t = from + 1; t < to; t++) {
    const before = weightedMean(levels, weights, 0, t - from);
    const after = weightedMean(levels, weights, t - from, to - from);
    // What two levels explain more than one.
    const gain =
      (before.weight * after.weight * wrap(after.mean - before.mean) ** 2) / (before.weight + after.weight);
    if (gain > most) [best, most] = [t, gain];
  }
  return best;
}

/** About the first value, so that angles next to each other do not wrap. */
function weightedMean(values: readonly number[], weights: readonly number[], from: number, to: number) {
  let [c, s, weight] = [0, 0, 0];
  for (let i = from; i < to; i++) {
    const [value, w] = [values[i]!, weights[i]!];
    if (Number.isNaN(value) || !(w > 0)) continue;
    c += w * Math.cos(value);
    s += w * Math.sin(value);
    weight += w;
  }
  return { mean: Math.atan2(s, c), weight };
}

function turnBack(grid: Grid, series: readonly Series[], step: FoundStep, gains: boolean): void {
  const { baselines, first, times } = grid;
  for (const b of grid.touching[step.antenna]!) {
    if (gains) {
      scaleBack(step, series, baselines, b, times.length);
      continue;
    }
    const angle = first[b] === step.antenna ? -step.phase : step.phase;
    const [c, s] = [Math.cos(angle), Math.sin(angle)];
    for (const which of step.series) {
      const { real, imag } = series[which]!;
      for (let t = step.at; t < times.length; t++) {
        const i = t * baselines + b;
        const [x, y] = [real[i]!, imag[i]!];
        real[i] = x * c - y * s;
        imag[i] = x * s + y * c;
      }
    }
  }
}

function scaleBack(
  step: FoundStep,
  series: readonly Series[],
  baselines: number,
  b: number,
  times: number,
): void {
  const factor = Math.exp(-step.phase);
  for (const which of step.series) {
    const { real, imag, variance } = series[which]!;
    for (let t = step.at; t < times; t++) {
      const i = t * baselines + b;
      real[i]! *= factor;
      imag[i]! *= factor;
      variance[i]! *= factor * factor;
    }
  }
}
