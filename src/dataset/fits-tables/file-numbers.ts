/** What one file of a dataset calls its antennas and fields, found by laying its rows beside the dataset's. */
import type { Dataset } from "../dataset.ts";
import type { RowsOfFile } from "../rows-of-file.ts";
import type { FileNumbers } from "./flag-rows.ts";
import type { FlagClock } from "./flag-times.ts";

/** Two passes over the row columns, side by side. @param own the file opened by itself */
export async function fileNumbers(
  { dataset, firstRow, rows }: RowsOfFile,
  own: Dataset,
  clock: FlagClock | undefined,
): Promise<FileNumbers> {
  const antennas = new Map<number, number>();
  const fields = new Map<number, number>();
  const times = new Set<number>();
  const blockRows = 4096;
  const theirs = own.blocks({ want: "rows", blockRows })[Symbol.asyncIterator]();
  try {
    for (let first = 0; first < rows; ) {
      const next = await theirs.next();
      if (next.done === true) break;
      const mine = next.value;
      const range = [firstRow + first, firstRow + first + mine.rows] as const;
      let row = 0;
      for await (const block of dataset.blocks({ want: "rows", rows: range, blockRows })) {
        for (let k = 0; k < block.rows; k++, row++) {
          antennas.set(block.antenna1[k]!, mine.antenna1[row]!);
          antennas.set(block.antenna2[k]!, mine.antenna2[row]!);
          fields.set(block.field[k]!, mine.field[row]!);
          const time = block.time[k]!;
          if (!Number.isNaN(time)) times.add(time);
        }
      }
      first += mine.rows;
    }
  } finally {
    await theirs.return?.();
  }
  return {
    shape: own.shape,
    polarizations: own.polarizations,
    antenna: (number) => antennas.get(number),
    field: (id) => fields.get(id),
    times: Float64Array.from(times).sort(),
    clock,
  };
}
