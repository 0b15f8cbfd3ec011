/** The FLAG tables: flags that were never put into the weights. */
import { mjdFromDate } from "../../util/dates.ts";
import type { Setup, Shape } from "../dataset.ts";
import type { Cursor } from "../fits/byte-source.ts";
import type { Hdu } from "../fits/hdus.ts";
import { type Column, findColumn, tableLayout } from "../fits/table-layout.ts";
import { readTable, type Table } from "../fits/table-rows.ts";
import type { AntennaTable } from "../fits-tables/antenna-table.ts";
import {
  clockOf,
  MOST_FLAGS,
  pair,
  products,
  range,
  timeRange,
  wholeOrNull,
} from "../fits-tables/flag-cells.ts";
import type { FlagClock } from "../fits-tables/flag-times.ts";
import type { Notes } from "../notes.ts";
import type { TableFlag } from "../table-flags.ts";
import { WORDS } from "./words.ts";

/** What entries refer to. */
export interface FlagContext {
  readonly antennas: readonly AntennaTable[];
  readonly setups: readonly Setup[];
  readonly shape: Shape;
}

interface Tally {
  entries: number;
  /** left out since they name times that nothing dates */
  undated: number;
  /** name no sub-band */
  bandless: number;
}

/** Entries of every FLAG table, whatever their SEVERITY. @throws InputError when one is malformed */
export async function readFlagTables(
  cursor: Cursor,
  hdus: readonly Hdu[],
  context: FlagContext,
  notes: Notes,
): Promise<TableFlag[]> {
  const flags: TableFlag[] = [];
  const tally: Tally = { entries: 0, undated: 0, bandless: 0 };
  for (const hdu of hdus) {
    const layout = tableLayout(hdu);
    if (layout.rows > MOST_FLAGS) {
      notes.fault(
        "flag-table-too-long",
        `the ${WORDS.flagTable} has ${layout.rows} entries, more than ${MOST_FLAGS}: it is left out`,
      );
      continue;
    }
    const table = await readTable(cursor, layout);
    // One by one: a spread of a long list overflows the stack.
    for (const flag of entriesOf(table, context, tally)) flags.push(flag);
  }
  noteTally(tally, notes);
  return flags;
}

function* entriesOf(table: Table, context: FlagContext, tally: Tally): Iterable<TableFlag> {
  const { antennas, setups, shape } = context;
  const { header } = table.layout.hdu;
  const find = (...names: string[]) => findColumn(table.layout, ...names);
  const columns = {
    source: find("SOURCE_ID", "SOURCE"),
    subarray: find("ARRAY"),
    setup: find("FREQID"),
    antennas: find("ANTS"),
    times: find("TIMERANG", "TIMERANGE"),
    subbands: find("BANDS"),
    channels: find("CHANS"),
    polarizations: find("PFLAGS"),
  };
  const setupIndex = new Map(setups.map(({ id }, index) => [id, index]));
  const ownDay = mjdFromDate(header.shown("RDATE") ?? "");
  for (let row = 0; row < table.rows; row++) {
    const subarray = wholeOrNull(table, row, columns.subarray);
    const times = timeRange(table, row, columns.times, clock(ownDay, antennas, subarray));
    if (times === undefined) {
      tally.undated++;
      continue;
    }
    const subbands = bandRuns(table, row, columns.subbands, shape.subbands);
    if (subbands.length === 0) tally.bandless++;
    else tally.entries++;
    const setup = wholeOrNull(table, row, columns.setup);
    const [antenna, otherAntenna] = pair(table, row, columns.antennas);
    const flag = {
      field: wholeOrNull(table, row, columns.source),
      subarray,
      setup: setup === null ? null : (setupIndex.get(setup) ?? -1),
      // (0, b) is every baseline to b, as (b, 0) is.
      antenna: antenna ?? otherAntenna,
      otherAntenna: antenna === null ? null : otherAntenna,
      start: times[0],
      end: times[1],
      channels: range(pair(table, row, columns.channels), shape.channels),
      polarizations: products(table, row, columns.polarizations, shape.polarizations),
    };
    for (const run of subbands) yield { ...flag, subbands: run };
  }
}

/** Times count from RDATE of the flag table, or of the array where it has none. */
function clock(
  ownDay: number,
  antennas: readonly AntennaTable[],
  subarray: number | null,
): FlagClock | undefined {
  const ofArray = clockOf(antennas, subarray);
  if (Number.isNaN(ownDay)) return ofArray;
  return { referenceDay: ownDay, timeOffset: ofArray?.timeOffset ?? antennas[0]?.timeOffset ?? 0 };
}

/** Runs of sub-bands whose number in BANDS is not 0; without the column all of them. */
function bandRuns(
  table: Table,
  row: number,
  column: Column | undefined,
  count: number,
): (readonly [number, number])[] {
  if (column === undefined) return [[0, count - 1]];
  const set = products(table, row, column, count);
  const runs: (readonly [number, number])[] = [];
  for (let band = 0; band < count; band++) {
    if (!set[band]) continue;
    const first = band;
    while (band + 1 < count && set[band + 1]) band++;
    runs.push([first, band]);
  }
  return runs;
}

function noteTally({ entries, undated, bandless }: Tally, notes: Notes): void {
  if (undated > 0) {
    notes.fault(
      "flag-table-undated",
      `${undated} entries of the ${WORDS.flagTable} name times, and no reference date is given: they are left out`,
    );
  }
  if (bandless > 0) {
    notes.fault(
      "flag-table-without-bands",
      `${bandless} ${bandless === 1 ? "entry" : "entries"} of the ${WORDS.flagTable} with BANDS all 0: taken to flag ` +
        "nothing, though some writers mean every sub-band",
    );
  }
  if (entries > 0) {
    const word = entries === 1 ? "entry" : "entries";
    notes.note("flag-table-applied", `applied as flags: ${entries} ${word} of the ${WORDS.flagTable}`);
  }
}
