/** What changed once a chart gave alarm: a step or a drift, since when, and how much. */
import { mean } from "simple-statistics";

export type Change =
  /** from one level to another between two nights */
  | { readonly kind: "step"; readonly from: number; readonly size: number; readonly error: number }
  /** by so much a night since a night */
  | { readonly kind: "drift"; readonly from: number; readonly size: number; readonly error: number };

/** Nights that a level before and after a change must hold. */
const LEAST_NIGHTS = 2;

/**
 * The step or the drift that leaves the least, by least squares, over every night it may have begun.
 *
 * @param night  (values) days, ascending; a drift is by day
 * @param values of the nights from the start of the chart on, the alarm among them
 * @returns `from`: index of the first value that has changed; size in the unit of the values, of a drift a day
 */
export function changeOf(night: ArrayLike<number>, values: ArrayLike<number>): Change {
  const count = values.length;
  let best: { change: Change; left: number } | null = null;
  const consider = (change: Change, left: number) => {
    // A step has the simpler story: a drift must leave clearly less.
    if (best === null || left < best.left) best = { change, left };
  };
  for (let from = LEAST_NIGHTS; from <= count - LEAST_NIGHTS; from++) {
    const step = regress(values, (i) => (i >= from ? 1 : 0));
    consider({ kind: "step", from, size: step.size, error: step.error }, step.left);
    if (from > count - LEAST_NIGHTS - 1) continue;
    const drift = regress(values, (i) => Math.max(0, night[i]! - night[from - 1]!));
    consider({ kind: "drift", from, size: drift.size, error: drift.error }, drift.left);
  }
  if (best !== null) return (best as { change: Change }).change;
  const from = count - 1;
  return {
    kind: "step",
    from,
    size: values[from]! - mean(Array.from(values).slice(0, from)),
    error: Number.NaN,
  };
}

/** Least squares of values = level + size x shape. */
function regress(
  values: ArrayLike<number>,
  shapeOf: (i: number) => number,
): { size: number; error: number; left: number } {
  const count = values.length;
  const shape = Float64Array.from({ length: count }, (_, i) => shapeOf(i));
  const [middle, level] = [mean(Array.from(shape)), mean(Array.from(values))];
  let [across, along] = [0, 0];
  for (let i = 0; i < count; i++) {
    across += (shape[i]! - middle) ** 2;
    along += (shape[i]! - middle) * (values[i]! - level);
  }
  const size = across > 0 ? along / across : 0;
  let left = 0;
  for (let i = 0; i < count; i++) left += (values[i]! - level - size * (shape[i]! - middle)) ** 2;
  const error = Math.sqrt(left / Math.max(1, count - 2) / Math.max(across, Number.MIN_VALUE));
  return { size, error, left };
}
