/**
 * The rows of one field of a dataset, as a dataset of its own. Nothing is copied but the block at hand.
 */
import { InputError, nearest } from "../util/errors.ts";
import type { BlockRequest, Dataset, Field, SampleBlock } from "./dataset.ts";

/**
 * The field that a user means, by its id or by its name, whatever the case.
 *
 * @throws InputError naming the fields there are, when it is none of them or several
 */
export function fieldNamed(dataset: Dataset, asked: string): Field {
  const wanted = asked.trim();
  const byId = dataset.fields.find(({ id }) => String(id) === wanted);
  if (byId !== undefined) return byId;
  const named = dataset.fields.filter(({ name }) => name.trim().toUpperCase() === wanted.toUpperCase());
  if (named.length === 1) return named[0]!;
  const place = { file: dataset.files[0] ?? dataset.name };
  if (named.length > 1) {
    const ids = named.map(({ id }) => id).join(", ");
    throw new InputError(
      `${named.length} fields are called "${wanted}": ${ids}`,
      place,
      "Give --field the id",
    );
  }
  const near = nearest(
    wanted,
    dataset.fields.map(({ name }) => name.trim()),
  );
  const shown = dataset.fields.slice(0, 20).map(({ id, name }) => `${id} ${name.trim()}`);
  const more = dataset.fields.length - shown.length;
  throw new InputError(
    `there is no field "${wanted}": the fields are ${shown.join(", ")}${more > 0 ? ` and ${more} more` : ""}`,
    place,
    near === undefined ? "Name one of these with --field, by id or name" : `Did you mean "${near}"?`,
  );
}

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

/** Rows of other fields that are read along: a new start in the file costs more than so many. */
const READ_ALONG = 2000;

/** Rows of the whole dataset to read for the rows [first, last) of the field: runs, joined where little lies between. */
function* spansOf(runs: FieldRuns, first: number, last: number): Generator<[number, number]> {
  let span: [number, number] | undefined;
  let before = 0;
  for (let run = 0; run < runs.start.length && before < last; run++) {
    const length = runs.length[run]!;
    const from = runs.start[run]! + Math.max(0, first - before);
    const to = runs.start[run]! + Math.min(length, last - before);
    before += length;
    if (from >= to) continue;
    if (span !== undefined && from - span[1] <= READ_ALONG) span[1] = to;
    else {
      if (span !== undefined) yield span;
      span = [from, to];
    }
  }
  if (span !== undefined) yield span;
}

async function* blocksOfField(
  dataset: Dataset,
  id: number,
  runs: FieldRuns,
  request: BlockRequest,
): AsyncIterable<SampleBlock> {
  const first = Math.max(0, request.rows?.[0] ?? 0);
  const last = Math.min(runs.rows, request.rows?.[1] ?? runs.rows);
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  let done = first;
  for (const rows of spansOf(runs, first, last)) {
    for await (const block of dataset.blocks({ ...request, rows })) {
      const kept = keepField(block, id, rowSamples);
      if (kept === 0) continue;
      block.firstRow = done;
      block.rows = kept;
      done += kept;
      yield block;
    }
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
