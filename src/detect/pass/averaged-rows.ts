/**
 * Rows that are not looked at, where something is there all the time: their averages have to do without its channels
 * as those of the rows looked at do, or an antenna would seem to step from one to the other.
 */
import type { SampleBlock } from "../../dataset/dataset.ts";
import type { Survey } from "../../measure/survey-result.ts";
import { newMeans, type RowMeans } from "./tile-result.ts";

export class AveragedRows {
  rows = 0;
  /** (capacity) cell of the tracks */
  readonly cells: Int32Array;
  /** (capacity x subbands x polarizations) */
  readonly means: RowMeans;
  private readonly survey: Survey;
  private readonly leftOut: Uint8Array;
  private readonly products: number;

  /** @param leftOut (channels of all sub-bands) 1 to do without */
  constructor(survey: Survey, leftOut: Uint8Array, capacity: number) {
    const { subbands, polarizations } = survey.dataset.shape;
    this.survey = survey;
    this.leftOut = leftOut;
    this.products = subbands * polarizations;
    this.cells = new Int32Array(capacity);
    this.means = newMeans(capacity * this.products);
  }

  clear(): void {
    this.means.count.fill(0, 0, this.rows * this.products);
    this.rows = 0;
  }

  /** The survey's means of a row, whose own the cell is, less the channels to be left out. */
  add(block: SampleBlock, row: number, cell: number): void {
    const place = this.rows++;
    this.cells[place] = cell;
    const { polarizations } = this.survey.dataset.shape;
    for (let product = 0; product < this.products; product++) {
      const at = place * this.products + product;
      this.addProduct(block, row, Math.floor(product / polarizations), product % polarizations, cell, at);
    }
  }

  private addProduct(block: SampleBlock, row: number, s: number, p: number, cell: number, at: number): void {
    const { leftOut, means, products, survey } = this;
    const { tracks } = survey;
    const { subbands, channels, polarizations } = survey.dataset.shape;
    const { real, imag, weight } = block;
    const from = (row * subbands + s) * channels * polarizations + p;
    const track = cell * products + s * polarizations + p;
    let lost = 0;
    let lostWeight = 0;
    let lostReal = 0;
    let lostImag = 0;
    let pairs = 0;
    let slopeReal = 0;
    let slopeImag = 0;
    for (let c = 0; c < channels; c++) {
      const own = leftOut[s * channels + c] === 1;
      const after = c + 1 < channels && leftOut[s * channels + c + 1] === 1;
      if (!own && !after) continue;
      const i = from + c * polarizations;
      if (!isUsable(block, i)) continue;
      if (own) {
        lost += 1;
        lostWeight += weight[i]!;
        lostReal += weight[i]! * real[i]!;
        lostImag += weight[i]! * imag[i]!;
      }
      const k = i + polarizations;
      if (c + 1 === channels || !isUsable(block, k)) continue;
      slopeReal += real[k]! * real[i]! + imag[k]! * imag[i]!;
      slopeImag += imag[k]! * real[i]! - real[k]! * imag[i]!;
      pairs += 1;
    }
    const left = tracks.usable[track]! - lost;
    const leftWeight = tracks.weight[track]! - lostWeight;
    if (left <= 0 || !(leftWeight > 0)) return;
    const sign = block.antenna1[row]! > block.antenna2[row]! ? -1 : 1;
    const leftPairs = Math.max(1, tracks.usable[track]! - 1 - pairs);
    means.real[at] = (tracks.real[track]! * tracks.weight[track]! - lostReal) / leftWeight;
    means.imag[at] = (tracks.imag[track]! * tracks.weight[track]! - sign * lostImag) / leftWeight;
    means.slopeReal[at] = (tracks.slopeReal[track]! - slopeReal) / leftPairs;
    means.slopeImag[at] = (tracks.slopeImag[track]! - sign * slopeImag) / leftPairs;
    means.count[at] = left;
    means.noise[at] = Number.NaN;
  }
}

function isUsable({ real, imag, weight }: SampleBlock, i: number): boolean {
  const w = weight[i]!;
  const power = real[i]! * real[i]! + imag[i]! * imag[i]!;
  return w > 0 && w < Number.POSITIVE_INFINITY && power > 0 && power < Number.POSITIVE_INFINITY;
}
