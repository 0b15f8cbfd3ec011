/**
 * The dynamic range that an error on some of the samples of a point source allows: the peak over the rms over the field
 * of the image of the error. For one snapshot of N antennas and small errors e of phase or amplitude this is the
 * published N(N-1)/(sqrt 2 e) of one baseline and N sqrt(N-1)/(sqrt 2 e) of one antenna; it counts how far Earth rotation
 * and bandwidth spread the error, and where the samples that carry it lie together.
 * @see Perley 1999, Synthesis Imaging in Radio Astronomy II, ASP Conf. Ser. 180, chapter 13
 */
import type { Selection } from "../dataset/selection.ts";
import { cellFactors, imagingWeight, truncated } from "./cell-weights.ts";
import type { GriddedImage } from "./cost.ts";
import { type ErrorPart, errorParts } from "./error-parts.ts";
import { addCellPoints, type CellFactor, pointList } from "./error-points.ts";
import type { EventError } from "./event-errors.ts";
import { meanSquareOverField } from "./field-rms.ts";
import { type ErrorCells, gridErrors } from "./grid-errors.ts";
import { type FilledCells, fieldCells } from "./moment-grid.ts";

/** An error on some samples. */
export interface SpoiledSamples {
  readonly scope: Selection;
  readonly error: EventError;
  /** on how many samples `error.own` is independent; of no account where that is 0 */
  readonly samples: number;
}

/** Selections gridded together hold no more than this. */
const MOST_BYTES = 200e6;
/** Bytes of a cell of a grid of second order, twice. */
const CELL_BYTES = 2 * 8 * 7;

/** Peak over rms that each error alone allows, at the planned weighting; Infinity where it touches no sample. */
export async function capsOf(image: GriddedImage, spoiled: readonly SpoiledSamples[]): Promise<number[]> {
  if (spoiled.length === 0) return [];
  const cells = truncated(image.cells, 0);
  const factors = cellFactors(cells, image.plan.weighting.value);
  const total = imagingWeight(cells, factors);
  const place = fieldCells(cells);
  const factorOf: CellFactor = (iu, iv) => factors[place(iu, iv)] ?? 0;
  const parts = spoiled.map(({ scope, error }) => errorParts(image.request.sampling, scope, error));
  const gridded = await gridAll(image, parts.flat());
  let from = 0;
  return spoiled.map(({ error, samples }, i) => {
    const own = parts[i]!.map((part, k) => ({ part, cells: gridded[from + k]! }));
    from += own.length;
    const square = together(own, factorOf) + (error.own ** 2 * apart(own, factorOf)) / Math.max(1, samples);
    return total / Math.sqrt(square);
  });
}

interface GriddedPart {
  readonly part: ErrorPart;
  readonly cells: ErrorCells;
}

/** Mean square over the field of the image of an error that is the same on all samples of a part, times sum T squared. */
function together(parts: readonly GriddedPart[], factorOf: CellFactor): number {
  const points = pointList();
  for (const { part, cells } of parts) {
    addCellPoints(points, cells.ahead, factorOf, part.real, part.imaginary);
    addCellPoints(points, cells.behind, factorOf, part.real, -part.imaginary);
  }
  return meanSquareOverField(points.take());
}

/**
 * The same of an error of rms 1 that each sample has on its own, times the number of samples: these add in squares. The
 * samples are taken to have the same weight.
 */
function apart(parts: readonly GriddedPart[], factorOf: CellFactor): number {
  let weight = 0;
  let squares = 0;
  const add = ({ count, iu, iv, weight: weights }: FilledCells) => {
    for (let i = 0; i < count; i++) {
      weight += weights[i]!;
      squares += weights[i]! * factorOf(iu[i]!, iv[i]!) ** 2;
    }
  };
  for (const { cells } of parts) {
    add(cells.ahead);
    add(cells.behind);
  }
  return (weight * squares) / 2;
}

/** Few at a time in memory. */
async function gridAll(image: GriddedImage, parts: readonly ErrorPart[]): Promise<ErrorCells[]> {
  const { request, gridded, cells } = image;
  // Every thread has grids of its own, and this one those of them all.
  const share = MOST_BYTES / (1 + (request.workers?.jobs ?? 0));
  const batch = Math.max(1, Math.floor(share / Math.max(1, cells.count * CELL_BYTES)));
  const all: ErrorCells[] = [];
  for (let from = 0; from < parts.length; from += batch) {
    const scopes = parts.slice(from, from + batch).map(({ scope }) => scope);
    all.push(...(await gridErrors(request, scopes, gridded.grid.index)));
  }
  return all;
}
