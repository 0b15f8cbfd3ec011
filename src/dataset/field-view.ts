/**
 * The rows of one field of a dataset, as a dataset of its own. Nothing is copied but the block at hand.
 */
import { InputError } from "../util/errors.ts";
import type { BlockRequest, Dataset, SampleBlock } from "./dataset.ts";

/** Runs of consecutive rows of the field: the rows [start, start + length) of the whole dataset. Plain data. */
export interface FieldRuns {
  readonly start: Float64Array;
  readonly length: Float64Array;
  readonly rows: number;
}

/**
 * @param id Field.id
 * @throws InputError when the dataset has no such field, or no row of it
 */
export async function fieldView(dataset: Dataset, id: number): Promise<Dataset> {
  const field = dataset.fields.find((candidate) => candidate.id === id);
  const ids = dataset.fields.map((candidate) => candidate.id).join(", ");
  const place = { file: dataset.files[0] ?? dataset.name };
  if (field === undefined) {
    throw new InputError(
      `there is no field ${id}: the fields are ${ids}`,
      place,
      "Name one of these with --field",
    );
  }
  const runs = await runsOf(dataset, id);
  if (runs.rows === 0) {
    throw new InputError(`no row belongs to field ${id}`, place, "visvet describe lists the fields");
  }
  return fieldRowsView(dataset, id, runs);
}

/** The view when it is known already where the rows of the field are. */
export function fieldRowsView(dataset: Dataset, id: number, runs: FieldRuns): Dataset {
  const { recipe, ...rest } = dataset;
  return {
    ...rest,
    fields: dataset.fields.filter((field) => field.id === id),
    rows: runs.rows,
    ...(recipe === undefined ? {} : { recipe: { kind: "field", of: recipe, id, runs } }),
    blocks: (request) => blocksOfField(dataset, id, runs, request),
  };
}

async function runsOf(dataset: Dataset, id: number): Promise<FieldRuns> {
  const start: number[] = [];
  const length: number[] = [];
  let rows = 0;
  let inside = false;
  for await (const block of dataset.blocks({ want: "rows" })) {
    for (let row = 0; row < block.rows; row++) {
      const wanted = block.field[row] === id;
      if (wanted && inside) length[length.length - 1]! += 1;
      else if (wanted) {
        start.push(block.firstRow + row);
        length.push(1);
      }
      inside = wanted;
      rows += wanted ? 1 : 0;
    }
  }
  return { start: Float64Array.from(start), length: Float64Array.from(length), rows };
}

/** Row of the whole dataset that is row `at` of the field, 0 <= at < runs.rows. */
function wholeRow(runs: FieldRuns, at: number): number {
  let left = at;
  for (let run = 0; run < runs.start.length; run++) {
    if (left < runs.length[run]!) return runs.start[run]! + left;
    left -= runs.length[run]!;
  }
  throw new RangeError(`row ${at} of a field of ${runs.rows} rows`);
}

async function* blocksOfField(
  dataset: Dataset,
  id: number,
  runs: FieldRuns,
  request: BlockRequest,
): AsyncIterable<SampleBlock> {
  const first = Math.max(0, request.rows?.[0] ?? 0);
  const last = Math.min(runs.rows, request.rows?.[1] ?? runs.rows);
  if (first >= last) return;
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  const rows: [number, number] = [wholeRow(runs, first), wholeRow(runs, last - 1) + 1];
  let done = first;
  for await (const block of dataset.blocks({ ...request, rows })) {
    const kept = keepField(block, id, rowSamples);
    if (kept === 0) continue;
    block.firstRow = done;
    block.rows = kept;
    done += kept;
    yield block;
  }
}

/** Move the rows of the field to the front of the block, in place; how many there are. */
function keepField(block: SampleBlock, id: number, rowSamples: number): number {
  let kept = 0;
  for (let row = 0; row < block.rows; row++) {
    if (block.field[row] !== id) continue;
    if (kept !== row) moveRow(block, row, kept, rowSamples);
    kept += 1;
  }
  return kept;
}

function moveRow(block: SampleBlock, from: number, to: number, rowSamples: number): void {
  const { time, u, v, w, antenna1, antenna2, subarray, field, setup, integration } = block;
  for (const column of [time, u, v, w, antenna1, antenna2, subarray, field, setup, integration]) {
    column[to] = column[from]!;
  }
  for (const samples of [block.real, block.imag, block.weight]) {
    if (samples.length > 0) samples.copyWithin(to * rowSamples, from * rowSamples, (from + 1) * rowSamples);
  }
}
