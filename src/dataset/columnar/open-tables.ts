/** Table files by what is in them: Parquet, Arrow IPC, or text with delimiters. */
import { InputError } from "../../util/errors.ts";
import { openSource } from "../fits/source.ts";
import type { ColumnMap } from "./column-map.ts";
import { delimiterOf, headerLine } from "./delimiter.ts";
import type { Table } from "./table.ts";

type TableFormat = Table["format"];

const HEAD_BYTES = 64 * 1024;
/** An Arrow stream begins with a continuation marker and the length of its schema (Arrow columnar format 1.0). */
const CONTINUATION = 0xffff_ffff;
const MOST_SCHEMA_BYTES = 1 << 24;
/** Time, two antennas, u, v, w, and two of the value. */
const LEAST_COLUMNS = 6;

/** The format of a table from its first bytes; undefined when it is none. */
export function tableFormat(head: Uint8Array): TableFormat | undefined {
  const text = Buffer.from(head.subarray(0, 9)).toString("latin1");
  if (text.startsWith("PAR1")) return "parquet";
  if (text.startsWith("ARROW1") || isArrowStream(head)) return "arrow";
  if (text.startsWith("SIMPLE  =") || !isText(head)) return undefined;
  const line = headerLine(head);
  const delimiter = line === undefined ? undefined : delimiterOf(line);
  if (line === undefined || delimiter === undefined) return undefined;
  const names = line.split(delimiter);
  // YAML and prose have commas too; the names of columns are short words, and there are some.
  return names.length >= LEAST_COLUMNS && names.every((name) => name.length <= 120) ? "text" : undefined;
}

function isArrowStream(head: Uint8Array): boolean {
  if (head.length < 8) return false;
  const view = new DataView(head.buffer, head.byteOffset, head.byteLength);
  const length = view.getInt32(4, true);
  return view.getUint32(0, true) === CONTINUATION && length > 0 && length < MOST_SCHEMA_BYTES;
}

/** No control characters but blanks and line ends. */
function isText(head: Uint8Array): boolean {
  return head.length > 0 && head.every((byte) => byte >= 32 || (byte >= 9 && byte <= 13));
}

/** Whether a file is called as column maps are: found in a folder of tables, it is no part of them. */
export function isMapName(path: string): boolean {
  return /(^|[./\\])columns\.yaml$/.test(path);
}

/** Whether a file is a table whose columns may be visibilities, told by its first bytes. */
export function looksColumnar(head: Uint8Array, _path: string): boolean {
  return tableFormat(head) !== undefined;
}

/** @throws InputError when it cannot be read or is no table */
export async function openTable(path: string): Promise<Table> {
  const source = await openSource(path);
  const cursor = await source.cursor();
  const head = new Uint8Array(HEAD_BYTES);
  let got: number;
  try {
    got = await cursor.read(head, 0);
  } finally {
    await cursor.close();
  }
  // The readers are large: what is not needed is not loaded.
  switch (tableFormat(head.subarray(0, got))) {
    case "parquet":
      return (await import("./parquet-table.ts")).openParquet(source);
    case "arrow":
      return (await import("./arrow-table.ts")).openArrow(source);
    case "text":
      return (await import("./text-table.ts")).openText(source);
    case undefined:
      throw new InputError(
        "this is no table of visibilities: expected Parquet, Arrow IPC, or CSV with a line of column names",
        { file: path },
      );
  }
}

/** All parts of a table hold the columns that the map names. @throws InputError at the part that does not */
export function requireSameColumns(tables: readonly Table[], { uses }: ColumnMap): void {
  const [first] = tables;
  const kinds = new Map(first!.columns.map(({ name, kind }) => [name, kind]));
  for (const table of tables.slice(1)) {
    const own = new Map(table.columns.map(({ name, kind }) => [name, kind]));
    for (const { column } of Object.values(uses)) {
      const kind = own.get(column);
      if (kind !== undefined && (kind === "list") === (kinds.get(column) === "list")) continue;
      throw new InputError(
        kind === undefined
          ? `there is no column "${column}", which ${first!.file} has`
          : `column "${column}" holds ${kind === "list" ? "lists" : "no lists"}, unlike that of ${first!.file}`,
        { file: table.file },
        "The parts of one table have the same columns",
      );
    }
  }
}
