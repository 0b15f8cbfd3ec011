/** Pieces of an invented observation as files, for the tests of joining. */
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll } from "vitest";
import type { Dataset, SampleBlock } from "../../../src/dataset/dataset.ts";
import { writeUvfits } from "../../../src/simulate/write-uvfits.ts";

/** The rows [first, last) of a dataset, as one of its own. */
export function rowsOf(dataset: Dataset, first: number, last: number): Dataset {
  return {
    ...dataset,
    rows: last - first,
    async *blocks(request) {
      const [from, to] = request.rows ?? [0, last - first];
      for await (const block of dataset.blocks({ ...request, rows: [first + from, first + to] })) {
        block.firstRow -= first;
        yield block;
      }
    },
  };
}

/** The dataset with something done to every block. */
export function changed(
  dataset: Dataset,
  change: (block: SampleBlock) => void,
  parts: Partial<Dataset> = {},
): Dataset {
  return {
    ...dataset,
    ...parts,
    async *blocks(request) {
      for await (const block of dataset.blocks(request)) {
        change(block);
        yield block;
      }
    },
  };
}

/** The same dataset with other antenna numbers, in the table and in the rows. */
export function renumbered(dataset: Dataset, number: (old: number) => number): Dataset {
  const array = {
    ...dataset.array,
    antennas: dataset.array.antennas.map((one) => ({ ...one, number: number(one.number) })),
  };
  const change = (block: SampleBlock) => {
    for (const column of [block.antenna1, block.antenna2]) {
      for (let row = 0; row < block.rows; row++) column[row] = number(column[row]!);
    }
  };
  return changed(dataset, change, { array });
}

/** A folder that goes with the tests of a file, and datasets written into it. */
export function pieceFolder(): {
  folder: string;
  write: (dataset: Dataset, name: string) => Promise<string>;
} {
  const folder = mkdtempSync(join(tmpdir(), "pieces-"));
  afterAll(() => rmSync(folder, { recursive: true }));
  const write = async (dataset: Dataset, name: string) => {
    const path = join(folder, name);
    await writeUvfits(dataset, path);
    return path;
  };
  return { folder, write };
}
