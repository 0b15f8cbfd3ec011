/** One baseline, band and polarization of a tile: time by frequency, and room to work in. */
import type { Band } from "./bands.ts";
import type { RowRun, Tile } from "./tiles.ts";

export class Plane {
  rows = 0;
  columns = 0;
  /** (rows x columns), column adjacent in memory; 0 where nothing is usable */
  real = new Float32Array(0);
  imag = new Float32Array(0);
  /** 0 a sample, 1 marked as outlying, 2 no sample */
  marks = new Uint8Array(0);
  /** 0 where a sample tells the background, else not */
  held = new Uint8Array(0);
  /** |V - background|^2, then over its noise, then as normal score */
  power = new Float32Array(0);
  /** the background */
  modelReal = new Float32Array(0);
  modelImag = new Float32Array(0);
  /** (rows) usable samples */
  usable = new Int32Array(0);

  resize(rows: number, columns: number): void {
    this.rows = rows;
    this.columns = columns;
    const size = rows * columns;
    if (this.real.length < size) {
      this.real = new Float32Array(size);
      this.imag = new Float32Array(size);
      this.marks = new Uint8Array(size);
      this.held = new Uint8Array(size);
      this.power = new Float32Array(size);
      this.modelReal = new Float32Array(size);
      this.modelImag = new Float32Array(size);
    }
    if (this.usable.length < rows) this.usable = new Int32Array(rows);
  }

  /** Take a run's samples of one band and polarization out of the tile. */
  take(tile: Tile, run: RowRun, band: Band, polarization: number, polarizations: number): void {
    this.resize(run.rows, band.columns);
    const { real, imag, marks, held, usable, columns } = this;
    for (let row = 0; row < run.rows; row++) {
      let from = tile.order[run.first + row]! * tile.rowSamples + band.first * polarizations + polarization;
      const start = row * columns;
      let count = 0;
      for (let i = start; i < start + columns; i++, from += polarizations) {
        real[i] = tile.real[from]!;
        imag[i] = tile.imag[from]!;
        const mark = tile.missing[from]!;
        marks[i] = mark;
        held[i] = mark;
        if (mark === 0) count += 1;
      }
      usable[row] = count;
    }
  }
}
