/** A copy of a FITS-IDI file with flags as a FLAG table of their own at its end, beside those that it has. */
import type { ByteSink } from "../../util/byte-sink.ts";
import type { Dataset } from "../dataset.ts";
import { copyWithTable } from "../fits/append.ts";
import type { FitsFile } from "../fits/hdus.ts";
import type { Header } from "../fits/header.ts";
import { type CardToWrite, card, real } from "../fits/write.ts";
import { readAntennaTable } from "../fits-tables/antenna-table.ts";
import { fileNumbers } from "../fits-tables/file-numbers.ts";
import { flagRowsOf, type ReasonedSelection } from "../fits-tables/flag-rows.ts";
import type { FlagClock } from "../fits-tables/flag-times.ts";
import { Notes } from "../notes.ts";
import type { RowsOfFile } from "../rows-of-file.ts";
import { findTables, type TableHdus } from "./tables.ts";
import { flagTableBytes } from "./write-flag-rows.ts";

/**
 * @param own the file opened by itself
 * @returns rows added
 * @throws CannotHoldFlags where a FLAG table cannot say what is selected
 */
export async function copyAddingIdiFlags(
  file: FitsFile,
  rows: RowsOfFile,
  own: Dataset,
  selections: readonly ReasonedSelection[],
  sink: ByteSink,
): Promise<number> {
  const hdus = findTables(file, new Notes());
  const clock = await clockOf(file, hdus);
  const { rows: added, timeForm } = flagRowsOf(selections, await fileNumbers(rows, own, clock));
  const version = Math.max(0, ...hdus.flags.map((hdu) => hdu.version)) + 1;
  const cards = sharedCards(hdus);
  const table = flagTableBytes(added, timeForm, own.shape.subbands, cards, version);
  await copyWithTable(file, added.length === 0 ? new Uint8Array(0) : table, sink);
  return added.length;
}

async function clockOf(file: FitsFile, { geometries }: TableHdus): Promise<FlagClock | undefined> {
  const [first] = geometries;
  if (first === undefined) return undefined;
  const cursor = await file.source.cursor();
  try {
    const { referenceDay, timeOffset } = await readAntennaTable(cursor, first, new Notes());
    return referenceDay === null ? undefined : { referenceDay, timeOffset };
  } finally {
    await cursor.close();
  }
}

const WHOLE = ["NO_STKD", "STK_1", "NO_BAND", "NO_CHAN"];
const REAL = ["REF_FREQ", "CHAN_BW", "REF_PIXL"];

/** What all tables of the file say, as its UV_DATA says it; times count from the RDATE of the array. */
function sharedCards({ data, geometries }: TableHdus): CardToWrite[] {
  const { header } = data[0]!;
  const ofArray: Header = geometries[0]?.header ?? header;
  const numbers = (keys: readonly string[], written: (value: number) => CardToWrite["value"]) =>
    keys.flatMap((key) => {
      const value = header.looseNumber(key);
      return value === undefined ? [] : [card(key, written(value)!)];
    });
  const date = ofArray.shown("RDATE");
  return [
    card("TABREV", 2, "revision of the table"),
    card("OBSCODE", header.shown("OBSCODE") ?? ""),
    ...numbers(WHOLE, Math.round),
    ...numbers(REAL, real),
    ...(date === undefined ? [] : [card("RDATE", date)]),
  ];
}
