/** Phase jumps and half turns of antennas, each with the interval it holds for. */
import type { DetectedEvent } from "../event.ts";
import { wrap } from "./antenna-phases.ts";
import { type FoundStep, findSteps } from "./find-steps.ts";
import type { Grid } from "./grid.ts";
import { clock, degrees, makeEvent, productsOf, spanOf } from "./make-event.ts";
import { phaseStep } from "./step-search.ts";

/** Sigmas out of family: of 10^5 trials on noise and wander none is. */
export const JUMP_THRESHOLD = 6.5;
/** Smaller ones are calibration's to mend, whatever they are. */
const LEAST_DEGREES = 3;
const HALF_TURN_DEGREES = 4;

/** A step and, where it came back, the step that undid it. */
interface Interval {
  readonly step: FoundStep;
  readonly back: FoundStep | null;
}

/**
 * @param skip antennas (indices) whose phase is no use
 * @returns the events, and the grid with their steps turned back
 */
export function phaseJumps(grid: Grid, skip: ReadonlySet<number>): { events: DetectedEvent[]; turned: Grid } {
  const planes = grid.planes.map((plane) => ({
    ...plane,
    real: plane.real.slice(),
    imag: plane.imag.slice(),
  }));
  const least = (LEAST_DEGREES * Math.PI) / 180;
  const steps = findSteps(grid, planes, {
    threshold: JUMP_THRESHOLD,
    least,
    skip,
    solve: phaseStep,
    gains: false,
  });
  return {
    events: intervalsOf(steps).map((interval) => eventOf(grid, interval)),
    turned: { ...grid, planes },
  };
}

/** Steps that may together undo one. */
const MOST_RETURNS = 3;

/** Each step with the next ones of its antenna and products that undo it. */
export function intervalsOf(steps: readonly FoundStep[]): Interval[] {
  const sorted = joined(steps);
  const used = new Set<FoundStep>();
  const intervals: Interval[] = [];
  for (const [i, step] of sorted.entries()) {
    if (used.has(step)) continue;
    const later = sorted.slice(i + 1).filter((other) => !used.has(other) && alike(step, other));
    const single = later.find((other) => undoes(step, other));
    const returns = single === undefined ? returnsOf(step, later) : [single];
    for (const one of returns) used.add(one);
    intervals.push({ step, back: returns.length === 0 ? null : returns.reduce(together) });
  }
  return intervals;
}

function alike(step: FoundStep, other: FoundStep): boolean {
  return step.antenna === other.antenna && step.series.join() === other.series.join();
}

/** A step within an integration, or over two, is one: halves next to each other the same way. */
function joined(steps: readonly FoundStep[]): FoundStep[] {
  const sorted = [...steps].sort((a, b) => a.antenna - b.antenna || a.at - b.at);
  const out: FoundStep[] = [];
  for (const step of sorted) {
    const last = out.at(-1);
    if (last !== undefined && alike(last, step) && step.at - last.at <= 1 && last.phase * step.phase > 0) {
      const larger = Math.abs(last.phase) >= Math.abs(step.phase) ? last : step;
      out[out.length - 1] = { ...together(last, step), at: larger.at };
    } else out.push(step);
  }
  return out;
}

/** One after the other; the time is that of the last. */
function together(a: FoundStep, b: FoundStep): FoundStep {
  return {
    ...b,
    phase: a.phase + b.phase,
    error: Math.hypot(a.error, b.error),
    significance: Math.max(a.significance, b.significance),
  };
}

function returnsOf(step: FoundStep, later: readonly FoundStep[]): readonly FoundStep[] {
  let sum: FoundStep | null = null;
  for (const [i, other] of later.slice(0, MOST_RETURNS).entries()) {
    // A step further away is the start of something else.
    if (other.phase * step.phase > 0) break;
    sum = sum === null ? other : together(sum, other);
    if (undoes(step, sum)) return later.slice(0, i + 1);
  }
  return [];
}

function undoes(step: FoundStep, other: FoundStep): boolean {
  // The sky and the air move on between the two.
  const tolerance = Math.max(4 * Math.hypot(step.error, other.error), 0.1 * Math.abs(step.phase));
  return Math.abs(wrap(step.phase + other.phase)) < Math.min(tolerance, Math.abs(step.phase) / 2);
}

function eventOf(grid: Grid, { step, back }: Interval): DetectedEvent {
  const { antennas, times } = grid;
  const { phase, error } = averaged(step, back);
  // Two antennas share what their baseline shows.
  const share = antennas.length >= 3 ? 1 : step.antenna === 0 ? 2 : -2;
  const size = degrees(wrap(share * phase));
  const sizeError = degrees(Math.abs(share) * error);
  const halfTurn = 180 - Math.abs(size) < Math.max(HALF_TURN_DEGREES, 3 * sizeError) && Math.abs(size) > 150;
  const [a, b] = [grid.antennas[step.antenna]!, antennas.length];
  const products = productsOf(grid, step.series);
  const end = back?.at ?? times.length;
  const scope = { ...scopeOf(grid, step.antenna), ...products, time: spanOf(grid, step.at, end) };
  const before = back === null && step.at < times.length - step.at;
  const flag = before ? { ...scope, time: spanOf(grid, 0, step.at) } : scope;
  const from = clock(times[step.at]!);
  const until = back === null ? "on" : `to ${clock(times[end - 1]!)}`;
  const who = b < 3 ? "the baseline" : `antenna ${a}`;
  return makeEvent(grid, {
    kind: halfTurn ? "half-turn" : "phase-jump",
    cause: b < 3 ? "baseline" : "antenna",
    scope,
    flag,
    size: halfTurn ? 180 : size,
    sizeError,
    unit: "deg",
    significance: step.significance,
    evidence:
      `The phase of ${who} turns by ${size.toFixed(1)} +- ${sizeError.toFixed(1)} deg from ${from} UTC ${until}` +
      `, ${step.significance.toFixed(1)} sigma out of its noise and wander` +
      (b < 3 ? "; two antennas cannot be told from their baseline." : ", on all its baselines alike."),
    repair: halfTurn
      ? `turn the phase of ${who} by 180 deg from ${from} UTC ${until}`
      : `calibrate ${who} separately before and after ${from} UTC${back === null ? "" : ` and ${clock(times[end]!)} UTC`}`,
  });
}

/** The antenna, or the baseline where there is one only. */
export function scopeOf(grid: Grid, antenna: number) {
  if (grid.antennas.length >= 3) return { antennas: [grid.antennas[antenna]!] };
  return { baselines: [[grid.antennas[0]!, grid.antennas[1]!] as const] };
}

function averaged(step: FoundStep, back: FoundStep | null): { phase: number; error: number } {
  if (back === null) return step;
  const [w1, w2] = [1 / step.error ** 2, 1 / back.error ** 2];
  // The return is minus the step; the difference is wrapped so that half turns do not cancel.
  const apart = wrap(-back.phase - step.phase);
  return { phase: step.phase + (apart * w2) / (w1 + w2), error: 1 / Math.sqrt(w1 + w2) };
}
