/** The rows of a joined dataset: those of its files one after the other, with the dataset's own numbers. */
import { InputError } from "../../util/errors.ts";
import type { BlockRequest, SampleBlock } from "../dataset.ts";
import type { Renumbering } from "./antennas.ts";
import type { Parts } from "./parts.ts";

/** What in the rows of a file has another number in the dataset; undefined: nothing. */
export interface PartNumbers {
  readonly antennas: Renumbering;
  readonly fields: ReadonlyMap<number, number> | undefined;
  /** by index of the file's setups */
  readonly setups: Int32Array | undefined;
}

export interface JoinedRows {
  readonly parts: Parts;
  readonly numbers: readonly PartNumbers[];
  /** (files + 1) first row of each */
  readonly start: Float64Array;
}

/** Only the files that hold rows asked for are opened. @throws InputError where a file is malformed or has changed */
export async function* joinedBlocks(joined: JoinedRows, request: BlockRequest): AsyncGenerator<SampleBlock> {
  const { parts, numbers, start } = joined;
  const first = Math.max(0, request.rows?.[0] ?? 0);
  const last = Math.min(start.at(-1)!, request.rows?.[1] ?? start.at(-1)!);
  for (let part = 0; part < numbers.length; part++) {
    const from = Math.max(first, start[part]!);
    const to = Math.min(last, start[part + 1]!);
    if (from >= to) continue;
    const dataset = await parts.open(part);
    requireSameRows(parts.paths[part]!, dataset.rows, start[part + 1]! - start[part]!);
    const rows: [number, number] = [from - start[part]!, to - start[part]!];
    for await (const block of dataset.blocks({ ...request, rows })) {
      block.firstRow += start[part]!;
      renumber(block, numbers[part]!);
      yield block;
    }
  }
}

function requireSameRows(path: string, found: number, expected: number): void {
  if (found === expected) return;
  throw new InputError(
    `the file has ${found} rows now and had ${expected} when it was opened`,
    { file: path },
    "The file changed while it was read: wait until it is written",
  );
}

function renumber(block: SampleBlock, { antennas, fields, setups }: PartNumbers): void {
  const { rows } = block;
  if (antennas !== undefined) {
    replace(block.antenna1, rows, antennas);
    replace(block.antenna2, rows, antennas);
  }
  if (fields !== undefined) replace(block.field, rows, fields);
  if (setups !== undefined) {
    for (let row = 0; row < rows; row++) block.setup[row] = setups[block.setup[row]!]!;
  }
}

function replace(column: Int32Array, rows: number, numbers: ReadonlyMap<number, number>): void {
  // Neighbouring rows mostly share the number.
  let before = -1;
  let after = -1;
  for (let row = 0; row < rows; row++) {
    const number = column[row]!;
    if (number !== before) {
      before = number;
      after = numbers.get(number) ?? number;
    }
    column[row] = after;
  }
}
