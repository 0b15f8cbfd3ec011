/**
 * Tracks without what stands out: means over the channels with outlying samples, and those that are flagged in some
 * integrations only, replaced by the background, so that interference does not turn an antenna's phase.
 */
import type { Survey } from "../../measure/survey-result.ts";
import type { Band } from "./bands.ts";
import type { Plane } from "./plane.ts";
import type { RowRun, Tile } from "./tiles.ts";

/** Arrays of products are (cells x subbands x polarizations) like those of the Tracks, NaN where nothing is usable. */
export class CleanTracks {
  readonly real: Float32Array;
  readonly imag: Float32Array;
  /** mean over channels of V(c+1) V*(c) */
  readonly slopeReal: Float32Array;
  readonly slopeImag: Float32Array;
  /** samples that the mean rests on */
  readonly count: Float32Array;
  /** 2 sigma^2 of one sample of the cell; NaN where it cannot be told */
  readonly noise: Float32Array;
  private readonly rows: Uint16Array;
  private readonly survey: Survey;

  constructor(survey: Survey) {
    this.survey = survey;
    const { subbands, polarizations } = survey.dataset.shape;
    const size = survey.tracks.cells * subbands * polarizations;
    const column = () => new Float32Array(size);
    this.real = column();
    this.imag = column();
    this.slopeReal = column();
    this.slopeImag = column();
    this.count = column();
    this.noise = column();
    this.rows = new Uint16Array(size);
  }

  /**
   * @param typical  2 sigma^2 of the plane
   * @param rowNoise (rows) over it; null where unknown
   */
  add(
    tile: Tile,
    run: RowRun,
    band: Band,
    polarization: number,
    plane: Plane,
    typical: number,
    rowNoise: Float32Array | null,
  ): void {
    const { channels } = this.survey.dataset.shape;
    const { columns } = plane;
    for (let row = 0; row < run.rows; row++) {
      const cell = tile.cell[tile.order[run.first + row]!]!;
      const noise = rowNoise === null ? Number.NaN : typical * rowNoise[row]!;
      for (let c = 0; c < columns; c += channels) {
        this.addRow(cell, Math.floor((band.first + c) / channels), polarization, plane, row, c, noise);
      }
    }
  }

  private addRow(
    cell: number,
    subband: number,
    polarization: number,
    plane: Plane,
    row: number,
    firstColumn: number,
    noise: number,
  ): void {
    const { subbands, channels, polarizations } = this.survey.dataset.shape;
    const { real, imag, modelReal, modelImag, marks, columns } = plane;
    const from = row * columns + firstColumn;
    let count = 0;
    let re = 0;
    let im = 0;
    let slopeRe = 0;
    let slopeIm = 0;
    let beforeRe = 0;
    let beforeIm = 0;
    for (let i = from; i < from + channels; i++) {
      const good = marks[i] === 0;
      if (good) count += 1;
      const x = good ? real[i]! : modelReal[i]!;
      const y = good ? imag[i]! : modelImag[i]!;
      re += x;
      im += y;
      slopeRe += x * beforeRe + y * beforeIm;
      slopeIm += y * beforeRe - x * beforeIm;
      beforeRe = x;
      beforeIm = y;
    }
    if (count === 0) return;
    const at = (cell * subbands + subband) * polarizations + polarization;
    this.real[at]! += re / channels;
    this.imag[at]! += im / channels;
    this.slopeReal[at]! += channels > 1 ? slopeRe / (channels - 1) : 0;
    this.slopeImag[at]! += channels > 1 ? slopeIm / (channels - 1) : 0;
    this.count[at]! += count;
    this.noise[at]! += noise;
    this.rows[at]! += 1;
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
