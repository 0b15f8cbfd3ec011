/** What the second pass keeps of each sample: bits. */
import type { Shape } from "../../dataset/dataset.ts";
import type { Survey } from "../../measure/survey-result.ts";
import type { Band } from "./bands.ts";
import { SampleBits } from "./bits.ts";
import type { Plane } from "./plane.ts";
import type { RowMarks } from "./tile-result.ts";

/** A single sample this many sigmas up is outlying: in 10^9 of noise there is one. */
export const SINGLE_SCORE = 6;
/** A sample above this is elevated: of noise, 5 in 100 are. */
export const ELEVATED_SCORE = 1.6448536269514722;
export const ELEVATED_SHARE = 0.05;
/** Samples for which bits are kept: four bitsets of 2^28 samples are 128 MB. */
const MOST_BITS = 2 ** 28;

export interface SampleMarks {
  readonly usable: SampleBits;
  readonly elevated: SampleBits;
  /** in a run that SumThreshold found on its baseline alone */
  readonly outlying: SampleBits;
  /** above SINGLE_SCORE by itself */
  readonly bright: SampleBits;
}

/** Words of a row's bits; 0 where the dataset is too large to keep a bit a sample. */
export function markWords({ dataset, tracks }: Survey): number {
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  return tracks.cells * rowSamples > MOST_BITS ? 0 : Math.ceil(rowSamples / 32);
}

/** Null where the dataset is too large. */
export function newSampleMarks(survey: Survey): SampleMarks | null {
  if (markWords(survey) === 0) return null;
  const { subbands, channels, polarizations } = survey.dataset.shape;
  const bits = () => new SampleBits(survey.tracks.cells, subbands * channels * polarizations);
  return { usable: bits(), elevated: bits(), outlying: bits(), bright: bits() };
}

/**
 * Set the bits of one row of a plane.
 *
 * @param place of the row in `marks`
 * @param words of a row
 */
export function fillMarks(
  marks: RowMarks,
  place: number,
  words: number,
  band: Band,
  polarization: number,
  { polarizations }: Shape,
  { columns, marks: found, power }: Plane,
  row: number,
): void {
  const base = place * words;
  let sample = band.first * polarizations + polarization;
  const from = row * columns;
  for (let i = from; i < from + columns; i++, sample += polarizations) {
    const mark = found[i]!;
    if (mark === 2) continue;
    const word = base + (sample >>> 5);
    const bit = 1 << (sample & 31);
    marks.usable[word]! |= bit;
    const score = power[i]!;
    if (mark === 0 && score <= ELEVATED_SCORE) continue;
    if (mark === 1) marks.outlying[word]! |= bit;
    if (score > ELEVATED_SCORE) marks.elevated[word]! |= bit;
    if (score > SINGLE_SCORE) marks.bright[word]! |= bit;
  }
}
