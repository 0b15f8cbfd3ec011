/** The cells of a survey as Tracks: sorted by baseline, then time, sums turned into means. */
import { KINDS, SUMS } from "./row-sums.ts";
import type { Tracks } from "./survey-result.ts";
import type { TrackCells } from "./track-cells.ts";

/** Everything but the scans, which need the integrations of the whole array. */
export type TracksWithoutScans = Omit<Tracks, "scan">;

/**
 * @param places  new number of each baseline
 */
export function finishTracks(cells: TrackCells, places: Int32Array, binSeconds: number): TracksWithoutScans {
  cells.putTogether();
  const order = cells.order(places);
  const baseline = cells.baseline.gather(order).map((index) => places[index]!);
  const sums = cells.sums.gather(order);
  const counts = cells.counts.gather(order);
  const length = order.length * cells.products;
  const means = new Means(length);
  for (let i = 0; i < length; i++) means.take(i, sums, counts);
  return {
    cells: order.length,
    binSeconds,
    baseline,
    firstCell: firstCells(baseline, places.length),
    time: cells.time.gather(order),
    u: cells.u.gather(order),
    v: cells.v.gather(order),
    w: cells.w.gather(order),
    field: cells.field.gather(order),
    setup: cells.setup.gather(order),
    subarray: cells.subarray.gather(order),
    integration: cells.integration.gather(order),
    ...means.columns,
  };
}

class Means {
  readonly columns;

  constructor(length: number) {
    this.columns = {
      real: new Float32Array(length),
      imag: new Float32Array(length),
      amplitude: new Float32Array(length),
      weight: new Float32Array(length),
      slopeReal: new Float32Array(length),
      slopeImag: new Float32Array(length),
      usable: new Uint32Array(length),
      flagged: new Uint32Array(length),
      bad: new Uint32Array(length),
      zero: new Uint32Array(length),
    };
  }

  take(i: number, sums: ArrayLike<number>, counts: ArrayLike<number>): void {
    const { columns } = this;
    const usable = counts[i * KINDS]!;
    const weight = sums[i * SUMS + 3]!;
    const mean = (sum: number, over: number) => (usable === 0 ? Number.NaN : sum / over);
    columns.real[i] = mean(sums[i * SUMS]!, weight);
    columns.imag[i] = mean(sums[i * SUMS + 1]!, weight);
    columns.amplitude[i] = mean(sums[i * SUMS + 2]!, usable);
    columns.weight[i] = weight;
    columns.slopeReal[i] = sums[i * SUMS + 4]!;
    columns.slopeImag[i] = sums[i * SUMS + 5]!;
    columns.usable[i] = usable;
    columns.flagged[i] = counts[i * KINDS + 1]!;
    columns.bad[i] = counts[i * KINDS + 2]!;
    columns.zero[i] = counts[i * KINDS + 3]!;
  }
}

/** (baselines + 1) first cell of each baseline of a sorted column. */
function firstCells(baseline: Int32Array, baselines: number): Int32Array {
  const first = new Int32Array(baselines + 1);
  for (const index of baseline) first[index + 1]! += 1;
  for (let i = 0; i < baselines; i++) first[i + 1]! += first[i]!;
  return first;
}
