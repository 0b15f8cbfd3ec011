/**
 * Antenna numbers of sub-arrays. Each antenna table may number its own antennas from 1: a number that means another
 * antenna in a later table becomes a new one, in the tables and in the rows, so that a number is one antenna.
 */
import type { BlockRequest, SampleBlock } from "../dataset.ts";
import type { Notes } from "../notes.ts";
import type { AntennaTable, Position, TableAntenna } from "./antenna-table.ts";

/** Metres between positions of one antenna in two tables. */
const SAME_PLACE = 1;

/** By sub-array, the number of the dataset for each number of the table that is another; empty where none is. */
export type SubarrayNumbers = ReadonlyMap<number, ReadonlyMap<number, number>>;

export interface DistinctTables {
  readonly tables: readonly AntennaTable[];
  readonly numbers: SubarrayNumbers;
}

interface Known {
  readonly antenna: TableAntenna;
  readonly table: AntennaTable;
  readonly number: number;
}

/** An antenna is told by its name and place: it keeps the number of the first table that has it. */
export function distinctNumbers(tables: readonly AntennaTable[], notes: Notes): DistinctTables {
  const known = new Map<string, Known[]>();
  const used = new Set<number>();
  const inTables = new Set(tables.flatMap(({ antennas }) => antennas.map(({ number }) => number)));
  const numbers = new Map<number, ReadonlyMap<number, number>>();
  let next = 1;
  const freeNumber = () => {
    while (inTables.has(next) || used.has(next)) next += 1;
    return next;
  };
  for (const table of tables) {
    const own = new Map<number, number>();
    const here = new Set<number>();
    for (const antenna of table.antennas) {
      const named = known.get(antenna.name) ?? [];
      const same = named.find((one) => !here.has(one.number) && isSame(one, { antenna, table }));
      const number = same?.number ?? (used.has(antenna.number) ? freeNumber() : antenna.number);
      if (same === undefined) known.set(antenna.name, [...named, { antenna, table, number }]);
      used.add(number);
      here.add(number);
      if (number !== antenna.number) own.set(antenna.number, number);
    }
    if (own.size > 0) numbers.set(table.subarray, own);
  }
  if (numbers.size === 0) return { tables, numbers };
  noteNumbers(numbers, notes);
  return { tables: tables.map((table) => withNumbers(table, numbers.get(table.subarray))), numbers };
}

function withNumbers(table: AntennaTable, own: ReadonlyMap<number, number> | undefined): AntennaTable {
  if (own === undefined) return table;
  const antennas = table.antennas.map((antenna) => ({
    ...antenna,
    number: own.get(antenna.number) ?? antenna.number,
  }));
  return { ...table, antennas };
}

function isSame(one: Omit<Known, "number">, other: Omit<Known, "number">): boolean {
  const [first, second] = [one.antenna.offset, other.antenna.offset];
  if (one.table === other.table) return false;
  if (first === null || second === null || distance(first, second) < SAME_PLACE) return true;
  const { origin, frame, hand } = one.table;
  // Tables in different frames cannot be compared as they stand: the name has to do.
  return (
    distance(origin, other.table.origin) >= SAME_PLACE ||
    frame !== other.table.frame ||
    hand !== other.table.hand
  );
}

function distance(one: Position, other: Position): number {
  return Math.hypot(one[0] - other[0], one[1] - other[1], one[2] - other[2]);
}

function noteNumbers(numbers: SubarrayNumbers, notes: Notes): void {
  const shown = [...numbers].slice(0, 3).map(([subarray, own]) => {
    const pairs = [...own].slice(0, 6).map(([from, to]) => `${from} is ${to}`);
    const more = own.size > 6 ? ` and ${own.size - 6} more` : "";
    return `in sub-array ${subarray}, ${pairs.join(", ")}${more}`;
  });
  const more = numbers.size > 3 ? `; and ${numbers.size - 3} more sub-arrays` : "";
  notes.note(
    "subarrays-renumbered",
    `sub-arrays give one number to different antennas, which have numbers of their own here: ${shown.join("; ")}${more}`,
  );
}

/** The rows with the dataset's numbers. */
export function withSubarrayNumbers(
  blocks: (request: BlockRequest) => AsyncIterable<SampleBlock>,
  numbers: SubarrayNumbers,
): (request: BlockRequest) => AsyncIterable<SampleBlock> {
  if (numbers.size === 0) return blocks;
  return async function* renumbered(request) {
    for await (const block of blocks(request)) {
      renumber(block, numbers);
      yield block;
    }
  };
}

function renumber({ rows, subarray, antenna1, antenna2 }: SampleBlock, numbers: SubarrayNumbers): void {
  for (let row = 0; row < rows; row++) {
    const own = numbers.get(subarray[row]!);
    if (own === undefined) continue;
    antenna1[row] = own.get(antenna1[row]!) ?? antenna1[row]!;
    antenna2[row] = own.get(antenna2[row]!) ?? antenna2[row]!;
  }
}
