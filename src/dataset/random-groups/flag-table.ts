/** The FG table: flags that were never put into the weights. By the visibility convention (Greisen 2016, recalled). */
import type { Setup, Shape } from "../dataset.ts";
import type { Cursor } from "../fits/byte-source.ts";
import type { Hdu } from "../fits/hdus.ts";
import { findColumn, tableLayout } from "../fits/table-layout.ts";
import { readTable } from "../fits/table-rows.ts";
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
import type { Notes } from "../notes.ts";
import type { TableFlag } from "../table-flags.ts";

/** @throws InputError when the table is malformed */
export async function readFlagTable(
  cursor: Cursor,
  hdu: Hdu,
  antennas: readonly AntennaTable[],
  setups: readonly Setup[],
  shape: Shape,
  notes: Notes,
): Promise<TableFlag[]> {
  const layout = tableLayout(hdu);
  if (layout.rows > MOST_FLAGS) {
    notes.fault(
      "flag-table-too-long",
      `the flag table (FG) has ${layout.rows} entries, more than ${MOST_FLAGS}: it is left out`,
    );
    return [];
  }
  const table = await readTable(cursor, layout);
  const find = (...names: string[]) => findColumn(table.layout, ...names);
  const columns = {
    source: find("SOURCE", "SOURCE_ID"),
    subarray: find("SUBARRAY", "ARRAY"),
    setup: find("FREQ ID", "FREQID", "FREQ_ID"),
    antennas: find("ANTS"),
    times: find("TIME RANGE", "TIMERANG"),
    subbands: find("IFS"),
    channels: find("CHANS"),
    polarizations: find("PFLAGS"),
  };
  const setupIndex = new Map(setups.map(({ id }, index) => [id, index]));
  const flags: TableFlag[] = [];
  let undated = 0;
  for (let row = 0; row < table.rows; row++) {
    const subarray = wholeOrNull(table, row, columns.subarray);
    const times = timeRange(table, row, columns.times, clockOf(antennas, subarray));
    const setupId = wholeOrNull(table, row, columns.setup);
    const setup = setupId === null ? null : (setupIndex.get(setupId) ?? -1);
    if (times === undefined) undated++;
    else {
      const [antenna, otherAntenna] = pair(table, row, columns.antennas);
      flags.push({
        field: wholeOrNull(table, row, columns.source),
        subarray,
        setup,
        // (0, b) is every baseline to b, as (b, 0) is.
        antenna: antenna ?? otherAntenna,
        otherAntenna: antenna === null ? null : otherAntenna,
        start: times[0],
        end: times[1],
        subbands: range(pair(table, row, columns.subbands), shape.subbands),
        channels: range(pair(table, row, columns.channels), shape.channels),
        polarizations: products(table, row, columns.polarizations, shape.polarizations),
      });
    }
  }
  if (undated > 0) {
    notes.fault(
      "flag-table-undated",
      `${undated} entries of the flag table (FG) name times, and no reference date is given: they are left out`,
    );
  }
  if (flags.length > 0) {
    const entries = flags.length === 1 ? "entry" : "entries";
    notes.note("flag-table-applied", `applied as flags: ${flags.length} ${entries} of the flag table (FG)`);
  }
  return flags;
}
