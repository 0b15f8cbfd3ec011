/** Gains of antennas that change at once. */
import type { DetectedEvent } from "../event.ts";
import { findSteps } from "./find-steps.ts";
import type { Grid } from "./grid.ts";
import { clock, makeEvent, productsOf, spanOf } from "./make-event.ts";
import { intervalsOf, scopeOf } from "./phase-jumps.ts";
import { gainStep } from "./step-search.ts";

const THRESHOLD = 7;
/** ln 1.08 */
const LEAST = 0.077;

export function gainSteps(grid: Grid): DetectedEvent[] {
  const series = grid.planes.map((plane) => ({
    ...plane,
    real: plane.real.slice(),
    imag: plane.imag.slice(),
    variance: plane.variance.slice(),
  }));
  const steps = findSteps(grid, series, {
    threshold: THRESHOLD,
    least: LEAST,
    skip: new Set(),
    solve: gainStep,
    gains: true,
  });
  return intervalsOf(steps).map(({ step, back }) => {
    const { times, antennas } = grid;
    const few = antennas.length < 3;
    const end = back?.at ?? times.length;
    const scope = {
      ...scopeOf(grid, step.antenna),
      ...productsOf(grid, step.series),
      time: spanOf(grid, step.at, end),
    };
    const log = back === null ? step.phase : (step.phase - back.phase) / 2;
    const error = back === null ? step.error : Math.hypot(step.error, back.error) / 2;
    // Two antennas share what their baseline shows.
    const size = Math.exp(few ? 2 * log : log);
    const flag =
      back === null && step.at < times.length - step.at
        ? { ...scope, time: spanOf(grid, 0, step.at) }
        : scope;
    const who = few ? "the baseline" : `antenna ${antennas[step.antenna]!}`;
    const from = clock(times[step.at]!);
    const until = back === null ? "on" : `to ${clock(times[end - 1]!)}`;
    return makeEvent(grid, {
      kind: "gain-step",
      cause: few ? "baseline" : "antenna",
      scope,
      flag,
      size,
      sizeError: error * size,
      unit: "ratio",
      significance: step.significance,
      evidence:
        `The gain of ${who} changes by a factor of ${size.toFixed(3)} +- ${(error * size).toFixed(3)} from ${from} UTC ${until}` +
        `, ${step.significance.toFixed(1)} sigma out of family.`,
      repair: `calibrate ${who} separately before and after ${from} UTC`,
    });
  });
}
