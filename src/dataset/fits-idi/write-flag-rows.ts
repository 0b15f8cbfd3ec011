/** Rows of a FLAG table (FITS Interferometry Data Interchange Convention, memo 114; columns recalled). */
import { binaryTable, type CardToWrite, type ColumnToWrite } from "../fits/write.ts";
import { ascii } from "../fits/write-header.ts";
import type { FlagRow } from "../fits-tables/flag-rows.ts";

/** PFLAGS and ANTS have fixed lengths. */
const PRODUCTS = 4;
const REASON_LENGTH = 24;
/** Any frequency setup; any array. */
const ANY_SETUP = -1;
const ANY_ARRAY = 0;
/** No level given. */
const SEVERITY = -1;

/**
 * A whole FLAG table, header and padded data.
 *
 * @param cards the keywords that all tables of a file share
 * @param bands NO_BAND
 */
export function flagTableBytes(
  rows: readonly FlagRow[],
  timeForm: "E" | "D",
  bands: number,
  cards: readonly CardToWrite[],
  version = 1,
): Uint8Array {
  const each = (name: string, value: number): ColumnToWrite => ({
    name,
    form: "1J",
    cells: rows.map(() => value),
  });
  const width = Math.max(REASON_LENGTH, ...rows.map(({ reason }) => reason.length));
  return binaryTable({
    name: "FLAG",
    version,
    cards,
    columns: [
      { name: "SOURCE_ID", form: "1J", cells: rows.map(({ field }) => field) },
      each("ARRAY", ANY_ARRAY),
      { name: "ANTS", form: "2J", cells: rows.map(({ antennas }) => antennas) },
      each("FREQID", ANY_SETUP),
      { name: "TIMERANG", form: `2${timeForm}`, unit: "DAYS", cells: rows.map(({ times }) => times) },
      {
        name: "BANDS",
        form: `${bands}J`,
        cells: rows.map(({ subbands }) =>
          Array.from({ length: bands }, (_, i) => Number(subbands[i] ?? false)),
        ),
      },
      { name: "CHANS", form: "2J", cells: rows.map(({ channels }) => channels) },
      {
        name: "PFLAGS",
        form: `${PRODUCTS}J`,
        cells: rows.map(({ polarizations }) =>
          Array.from({ length: PRODUCTS }, (_, p) => Number(polarizations[p] ?? false)),
        ),
      },
      { name: "REASON", form: `${width}A`, cells: rows.map(({ reason }) => ascii(reason)) },
      each("SEVERITY", SEVERITY),
    ],
  });
}
