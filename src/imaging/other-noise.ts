/**
 * Noise of baselines that are not in the survey, where that holds but an even choice of them: what it is on the choice's
 * baselines of their antennas. The noise of a baseline goes with the product of its antennas'; of the two, the antenna
 * that is less like the others says what it is.
 */
import type { Survey } from "../measure/survey-result.ts";
import { median } from "../util/statistics.ts";

type Baselines = Pick<Survey, "baselines" | "others" | "dataset">;

/** Ascending. */
function antennasOf({ baselines }: Baselines): number[] {
  const numbers = new Set<number>();
  for (const { antenna1, antenna2 } of baselines) numbers.add(antenna1).add(antenna2);
  return [...numbers].sort((a, b) => a - b);
}

/**
 * Weight x variance by baseline, and after them by antenna, ascending, and of all together.
 *
 * @param variance (baselines x samples of a row); comes back as it is where all baselines are in the survey
 */
export function withAntennas(survey: Baselines, variance: Float64Array): Float64Array {
  const { baselines, others, dataset } = survey;
  if (others === undefined) return variance;
  const { subbands, channels, polarizations } = dataset.shape;
  const samples = subbands * channels * polarizations;
  const own = new Map<number, number[]>(antennasOf(survey).map((antenna) => [antenna, []]));
  for (const [b, { antenna1, antenna2 }] of baselines.entries()) {
    own.get(antenna1)!.push(b);
    own.get(antenna2)!.push(b);
  }
  const lists = [...own.values(), Array.from(baselines.keys())];
  const all = new Float64Array(variance.length + lists.length * samples);
  all.set(variance);
  for (const [i, list] of lists.entries()) {
    const values = new Float64Array(list.length);
    for (let k = 0; k < samples; k++) {
      for (let j = 0; j < list.length; j++) values[j] = variance[list[j]! * samples + k]!;
      all[variance.length + i * samples + k] = median(values);
    }
  }
  return all;
}

/** Finds the noise of a baseline that is not in the survey. */
export class AntennaNoise {
  private readonly offsets = new Map<number, number>();
  /** by antenna, how far its noise is from that of all */
  private readonly odd = new Map<number, number>();
  private readonly ofAll: number;

  /** @param variance of `withAntennas` */
  constructor(survey: Baselines, rowSamples: number, variance: Float64Array) {
    const antennas = antennasOf(survey);
    const first = survey.baselines.length * rowSamples;
    this.ofAll = first + antennas.length * rowSamples;
    const level = (offset: number) => median(variance.slice(offset, offset + rowSamples));
    const typical = level(this.ofAll);
    for (const [i, antenna] of antennas.entries()) {
      const offset = first + i * rowSamples;
      this.offsets.set(antenna, offset);
      this.odd.set(antenna, Math.abs(Math.log(level(offset) / typical)));
    }
  }

  /** Where its noise is in `variance`. */
  offset(antenna1: number, antenna2: number): number {
    const isFirst = !((this.odd.get(antenna1) ?? 0) < (this.odd.get(antenna2) ?? 0));
    return this.offsets.get(isFirst ? antenna1 : antenna2) ?? this.ofAll;
  }
}
