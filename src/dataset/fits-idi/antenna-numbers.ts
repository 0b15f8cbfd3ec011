/** The ANTENNA tables: which number in the rows each antenna goes by. Its name links it to its place in ARRAY_GEOMETRY. */
import type { Cursor } from "../fits/byte-source.ts";
import type { Hdu } from "../fits/hdus.ts";
import { findColumn, requireColumn, tableLayout } from "../fits/table-layout.ts";
import { readTable } from "../fits/table-rows.ts";
import {
  type AntennaTable,
  antennaNumber,
  nameKey,
  type TableAntenna,
} from "../fits-tables/antenna-table.ts";
import type { Notes } from "../notes.ts";

/** Of one array; null: of all. */
export type AntennaNumbers = ReadonlyMap<number | null, ReadonlyMap<string, NumberedAntenna>>;

interface NumberedAntenna {
  readonly number: number;
  /** as written; hostile text */
  readonly name: string;
}

/**
 * There is a row for each antenna, frequency setup and stretch of time: the first of each name counts.
 *
 * @throws InputError when a table is malformed
 */
export async function readAntennaNumbers(
  cursor: Cursor,
  hdus: readonly Hdu[],
  notes: Notes,
): Promise<AntennaNumbers> {
  const arrays = new Map<number | null, Map<string, NumberedAntenna>>();
  for (const hdu of hdus) {
    const table = await readTable(cursor, tableLayout(hdu));
    const name = requireColumn(table.layout, "ANNAME");
    const number = findColumn(table.layout, "ANTENNA_NO", "ANTENNA_NO.", "NOSTA");
    const array = findColumn(table.layout, "ARRAY");
    if (number === undefined) continue;
    const renumbered = new Set<string>();
    for (let row = 0; row < table.rows; row++) {
      const key = array === undefined ? null : table.number(row, array) || 1;
      const antennas = arrays.get(key) ?? new Map<string, NumberedAntenna>();
      arrays.set(key, antennas);
      const text = table.text(row, name).trim();
      const id = antennaNumber(table, row, number);
      const earlier = antennas.get(nameKey(text));
      if (earlier === undefined) antennas.set(nameKey(text), { number: id, name: text });
      else if (earlier.number !== id) renumbered.add(text);
    }
    if (renumbered.size > 0) {
      const names = [...renumbered].slice(0, 10).join(", ");
      notes.fault(
        "antenna-twice",
        `${hdu.header.place.part} has more than one number for ${names}: the first counts`,
      );
    }
  }
  return arrays;
}

/** Numbers by `nameKey` of the antennas of one array. */
export function numbersOf(numbers: AntennaNumbers, array: number): ReadonlyMap<string, number> {
  const antennas = numbers.get(array) ?? numbers.get(null) ?? new Map<string, NumberedAntenna>();
  return new Map([...antennas].map(([key, { number }]) => [key, number]));
}

/** The table with the antennas that have a number and no place in it. */
export function withUnplaced(table: AntennaTable, numbers: AntennaNumbers, notes: Notes): AntennaTable {
  const known = new Set(table.antennas.map(({ number }) => number));
  const antennas = numbers.get(table.subarray) ?? numbers.get(null) ?? new Map<string, NumberedAntenna>();
  const unplaced = [...antennas.values()].filter(({ number }) => !known.has(number));
  if (unplaced.length === 0) return table;
  const names = unplaced.slice(0, 10).map(({ name }) => name);
  notes.fault(
    "missing-antenna-positions",
    `${table.part} has no row for ${names.join(", ")} of the ANTENNA table: their positions are unknown`,
  );
  const added = unplaced.map(
    ({ number, name }): TableAntenna => ({
      number,
      name: name === "" ? String(number) : name,
      offset: null,
      diameter: null,
    }),
  );
  return { ...table, antennas: [...table.antennas, ...added] };
}
