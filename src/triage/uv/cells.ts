/**
 * The uv plane of an image in cells of one over its width: the amplitude in each, what noise would put there, and which
 * are out of family.
 */
import type { Atoms } from "../samples/atoms.ts";
import type { Understanding } from "../sky/understand.ts";

/** The half plane of cycles along y >= 0; the other half is its mirror. */
export interface UvCells {
  /** cells along x (as many as pixels), and along y from 0 */
  readonly columns: number;
  readonly rows: number;
  /** (rows x columns) |transform| squared */
  readonly power: Float64Array;
  /** (rows x columns) expected of noise; 0 where no sample is near */
  readonly expected: Float64Array;
  /** cells out of family: places in `power`, most power first */
  readonly outliers: Uint32Array;
}

/** A cell is out of family where noise alone would reach its power in one of so many images. */
const ONE_IMAGE_IN = 1000;
/** Cells with less than this share of the mean expectation hold no sample to speak of. */
const LEAST_EXPECTED = 0.05;

export function uvCells(seen: Understanding): UvCells {
  const { transformer, residual, image } = seen;
  const columns = image.width;
  const rows = (image.height >> 1) + 1;
  const spectrum = transformer.spectrum(residual);
  const power = new Float64Array(columns * rows);
  for (let row = 0, at = 0; row < rows; row++) {
    for (let column = 0; column < columns; column++, at++) {
      spectrum.read((column - (columns >> 1)) / image.width, row / image.height);
      power[at] = spectrum.re ** 2 + spectrum.im ** 2;
    }
  }
  const expected = expectedPower(seen, columns, rows);
  return { columns, rows, power, expected, outliers: outliersOf(power, expected) };
}

/** Half the variance of each sample, times the pixels squared, shared out among the four cells around it. */
function expectedPower(seen: Understanding, columns: number, rows: number): Float64Array {
  const { atoms, weights, image } = seen;
  const expected = new Float64Array(columns * rows);
  if (!(seen.noise > 0)) return expected;
  const scale = seen.scale > 0 ? seen.scale : 1;
  const pixels = image.known.reduce((sum, one) => sum + one, 0);
  for (let k = 0; k < atoms.count; k++) {
    const weight = weights[k]!;
    if (weight === 0) continue;
    const share = ((scale * weight) ** 2 * (atoms.noise / atoms.weight[k]!) * pixels ** 2) / 2;
    eachCell(atoms, k, image, columns, rows, (cell, part) => {
      expected[cell]! += part * share;
    });
  }
  return expected;
}

/** The cells around a sample and the share of each. */
function eachCell(
  atoms: Atoms,
  k: number,
  { width, height }: { readonly width: number; readonly height: number },
  columns: number,
  rows: number,
  visit: (cell: number, part: number) => void,
): void {
  const turn = atoms.cycles.y[k]! < 0 ? -1 : 1;
  const x = turn * atoms.cycles.x[k]! * width + (columns >> 1);
  const y = turn * atoms.cycles.y[k]! * height;
  const [x0, y0] = [Math.floor(x), Math.floor(y)];
  for (let j = 0; j < 2; j++) {
    for (let i = 0; i < 2; i++) {
      const [column, row] = [x0 + i, y0 + j];
      if (column < 0 || column >= columns || row >= rows) continue;
      visit(row * columns + column, (i === 0 ? 1 - x + x0 : x - x0) * (j === 0 ? 1 - y + y0 : y - y0));
    }
  }
}

function outliersOf(power: Float64Array, expected: Float64Array): Uint32Array {
  const filled = expected.filter((value) => value > 0);
  if (filled.length === 0) return new Uint32Array(0);
  const floor = (LEAST_EXPECTED * filled.reduce((sum, value) => sum + value, 0)) / filled.length;
  // Powers of noise are exponentially distributed.
  const limit = Math.log(filled.length * ONE_IMAGE_IN);
  const found: number[] = [];
  for (let i = 0; i < power.length; i++) {
    // Beside the samples the window of the image smears what is strong: that is nothing of its own.
    if (expected[i]! > 0 && power[i]! > limit * Math.max(floor, expected[i]!)) found.push(i);
  }
  return Uint32Array.from(found.sort((a, b) => power[b]! - power[a]! || a - b));
}

/** How much of the power out of family lies on a baseline's samples. */
export interface OnTrack {
  /** index in Survey.baselines */
  readonly baseline: number;
  readonly share: number;
  /** bins of the first and last time at which it has samples there */
  readonly first: number;
  readonly last: number;
}

/** The baselines with samples on cells out of family, those with most of their power first. */
export function tracksOnOutliers(seen: Understanding, cells: UvCells): OnTrack[] {
  const { atoms, weights, image, sampling } = seen;
  const marked = new Uint8Array(cells.power.length);
  for (const cell of cells.outliers) marked[cell] = 1;
  const inCell = new Float64Array(cells.power.length);
  const count = sampling.survey.baselines.length;
  const share = new Float64Array(count);
  const first = new Int32Array(count).fill(atoms.bins.times);
  const last = new Int32Array(count).fill(-1);
  const visit = (use: (k: number, cell: number, part: number) => void) => {
    for (let k = 0; k < atoms.count; k++) {
      if (weights[k] === 0) continue;
      eachCell(atoms, k, image, cells.columns, cells.rows, (cell, part) => {
        if (marked[cell] === 1 && part > 0) use(k, cell, part * weights[k]!);
      });
    }
  };
  visit((_, cell, part) => {
    inCell[cell]! += part;
  });
  let all = 0;
  visit((k, cell, part) => {
    const baseline = atoms.baseline[k]!;
    const power = (cells.power[cell]! * part) / inCell[cell]!;
    share[baseline]! += power;
    all += power;
    first[baseline] = Math.min(first[baseline]!, atoms.time[k]!);
    last[baseline] = Math.max(last[baseline]!, atoms.time[k]!);
  });
  return Array.from({ length: count }, (_, baseline) => ({
    baseline,
    share: all > 0 ? share[baseline]! / all : 0,
    first: first[baseline]!,
    last: last[baseline]!,
  }))
    .filter((track) => track.share > 0)
    .sort((a, b) => b.share - a.share || a.baseline - b.baseline);
}
