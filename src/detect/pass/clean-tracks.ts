/**
 * Tracks without what stands out: means over the channels with outlying samples, and those that are flagged in some
 * integrations only, replaced by the background, so that interference does not turn an antenna's phase. Cells whose rows
 * the second pass did not read are left to the survey's tracks.
 */
import type { Survey } from "../../measure/survey-result.ts";
import { newMeans, type RowMeans } from "./tile-result.ts";

/** Arrays of products are (cells x subbands x polarizations) like those of the Tracks. */
export class CleanTracks implements RowMeans {
  /** NaN where nothing is usable */
  readonly real: RowMeans["real"];
  readonly imag: RowMeans["imag"];
  /** mean over channels of V(c+1) V*(c) */
  readonly slopeReal: RowMeans["slopeReal"];
  readonly slopeImag: RowMeans["slopeImag"];
  /** samples that the mean rests on */
  readonly count: RowMeans["count"];
  /** 2 sigma^2 of one sample of the cell; NaN where it cannot be told */
  readonly noise: RowMeans["noise"];
  private readonly rows: Uint16Array;
  private readonly products: number;

  constructor({ dataset, tracks }: Survey) {
    const { subbands, polarizations } = dataset.shape;
    this.products = subbands * polarizations;
    const means = newMeans(tracks.cells * this.products);
    this.real = means.real;
    this.imag = means.imag;
    this.slopeReal = means.slopeReal;
    this.slopeImag = means.slopeImag;
    this.count = means.count;
    this.noise = means.noise;
    this.rows = new Uint16Array(this.real.length);
  }

  /** @param cells (rows) cell of each */
  add(cells: Int32Array, means: RowMeans): void {
    const { products } = this;
    for (let row = 0; row < cells.length; row++) {
      let from = row * products;
      let at = cells[row]! * products;
      for (const end = from + products; from < end; from++, at++) {
        if (means.count[from] === 0) continue;
        this.real[at]! += means.real[from]!;
        this.imag[at]! += means.imag[from]!;
        this.slopeReal[at]! += means.slopeReal[from]!;
        this.slopeImag[at]! += means.slopeImag[from]!;
        this.count[at]! += means.count[from]!;
        this.noise[at]! += means.noise[from]!;
        this.rows[at]! += 1;
      }
    }
  }

  /** Turn sums over the rows of a cell into means. */
  finish(): void {
    const { real, imag, slopeReal, slopeImag, noise, rows } = this;
    for (let i = 0; i < rows.length; i++) {
      const n = rows[i]!;
      if (n === 1) continue;
      const scale = n === 0 ? Number.NaN : 1 / n;
      real[i]! *= scale;
      imag[i]! *= scale;
      slopeReal[i]! *= scale;
      slopeImag[i]! *= scale;
      noise[i]! *= scale;
    }
  }
}
