/** Flags from a table: flags.csv or flags.parquet, or one that somebody wrote with the same columns. */
import { readFile } from "node:fs/promises";
import { CsvError, parse } from "csv-parse/sync";
import { asyncBufferFromFile, parquetReadObjects } from "hyparquet";
import { compressors } from "hyparquet-compressors";
import { InputError, type Place } from "../util/errors.ts";
import type { AcceptedFlags } from "./accepted.ts";
import { type FlagRecord, flagOfRecord, requireColumns } from "./flag-table.ts";

const MOST_FLAGS = 100_000;

interface Line {
  readonly record: readonly string[];
  /** of its end, from 1 */
  readonly line: number;
}

/** @throws InputError with the line */
export async function readFlagCsv(path: string): Promise<AcceptedFlags> {
  const text = await readFile(path, "utf8");
  const lines: Line[] = [];
  try {
    parse(text, {
      bom: true,
      skip_empty_lines: true,
      relax_column_count: true,
      on_record: (record: readonly string[], { lines: line }) => {
        lines.push({ record, line });
        return null;
      },
    });
  } catch (cause) {
    if (!(cause instanceof CsvError)) throw cause;
    throw new InputError(
      `not a table of flags: ${cause.message}`,
      { file: path },
      "Give the flags.json, flags.csv, flags.parquet or flags.fits that visvet check wrote",
      { cause },
    );
  }
  const [head, ...rows] = lines;
  const names = head?.record.map((name) => name.trim()) ?? [];
  requireColumns(names, { file: path, line: 1 });
  const records = rows.map(({ record, line }) => {
    const place: Place = { file: path, line };
    if (record.length !== names.length) {
      throw new InputError(`the line has ${record.length} cells: expected ${names.length}`, place);
    }
    return { record: Object.fromEntries(names.map((name, i) => [name, record[i]!])), place };
  });
  return flagsOf(records, path);
}

/** @throws InputError with the row */
export async function readFlagParquet(path: string): Promise<AcceptedFlags> {
  let records: FlagRecord[];
  try {
    records = (await parquetReadObjects({
      file: await asyncBufferFromFile(path),
      compressors,
    })) as FlagRecord[];
  } catch (cause) {
    const why = cause instanceof Error ? cause.message : String(cause);
    throw new InputError(`not a Parquet file that can be read: ${why}`, { file: path }, undefined, { cause });
  }
  if (records.length > 0) requireColumns(Object.keys(records[0]!), { file: path });
  return flagsOf(
    records.map((record, i) => ({ record, place: { file: path, row: i + 1 } })),
    path,
  );
}

function flagsOf(
  records: readonly { readonly record: FlagRecord; readonly place: Place }[],
  path: string,
): AcceptedFlags {
  if (records.length > MOST_FLAGS) {
    throw new InputError(`${records.length} flags: expected at most ${MOST_FLAGS}`, { file: path });
  }
  const named = records.find(({ record }) => typeof record.dataset === "string" && record.dataset !== "");
  return {
    dataset: named === undefined ? null : String(named.record.dataset),
    flags: records.map(({ record, place }) => flagOfRecord(record, place)),
  };
}
