/** Tables copied with selections flagged: in the column of flags, or by the sign of the weights. */
import type { ByteSink } from "../../util/byte-sink.ts";
import { CannotHoldFlags } from "../cannot-hold.ts";
import type { Dataset } from "../dataset.ts";
import type { Selection } from "../selection.ts";
import type { ColumnMap } from "./column-map.ts";
import { FlagPlacer, type PlacedBatch } from "./flag-placer.ts";
import type { FlagWay } from "./flagged-cell.ts";
import { columnMapText } from "./map-text.ts";
import { openTable } from "./open-tables.ts";
import type { Table } from "./table.ts";

export interface TableCopies {
  /** one a file of the dataset, in its order */
  readonly sinks: readonly (() => Promise<ByteSink>)[];
  readonly onFile: (share: number) => void;
}

/** @throws CannotHoldFlags where no column can say what is selected */
export async function copyFlaggedTables(
  dataset: Dataset,
  selections: readonly Selection[],
  place: "flag-column" | "weights",
  { sinks, onFile }: TableCopies,
): Promise<void> {
  const map = columnMapOf(dataset);
  const { column, way } = chosenColumn(map, place);
  const tables: Table[] = [];
  for (const file of dataset.files) tables.push(await openTable(file));
  const placer = await FlagPlacer.create(tables, map, selections, [column]);
  for (const [i, table] of tables.entries()) {
    const sink = await sinks[i]!();
    try {
      await copyTable(table, column, way, placer.batchesOf(table), sink);
      await sink.finish();
    } catch (error) {
      await sink.abandon();
      throw error;
    }
    onFile((i + 1) / tables.length);
  }
}

/** The map that the dataset was opened with. */
export function columnMapOf(dataset: Dataset): ColumnMap {
  if (!("columnMap" in dataset)) throw new RangeError(`${dataset.name} has no columns`);
  return dataset.columnMap as ColumnMap;
}

/** The map in force, for a copy that lies elsewhere: what it took from other files is in it. */
export function columnMapTextOf(dataset: Dataset): string {
  const map = columnMapOf(dataset);
  const { antennaFile, ...constants } = map.constants;
  if (antennaFile === undefined) return columnMapText(map);
  const { antennas, frame } = dataset.array;
  return columnMapText({ ...map, constants: { ...constants, antennas, frame } });
}

function chosenColumn(
  { uses }: ColumnMap,
  place: "flag-column" | "weights",
): { column: string; way: FlagWay } {
  if (place === "flag-column") {
    if (uses.flag !== undefined) return { column: uses.flag.column, way: "flag" };
    throw new CannotHoldFlags("no column of the table holds flags");
  }
  const weight = uses.weight ?? uses.sigma;
  if (weight !== undefined) return { column: weight.column, way: "sign" };
  throw new CannotHoldFlags(
    "no column of the table holds flags or weights",
    "Add a column of flags, all 0, to the table, and name it as the flag in its column map",
  );
}

/** The writers are large: what is not needed is not loaded. */
async function copyTable(
  table: Table,
  column: string,
  way: FlagWay,
  batches: AsyncIterable<PlacedBatch>,
  sink: ByteSink,
): Promise<void> {
  switch (table.format) {
    case "text":
      return (await import("./flag-text.ts")).copyFlaggingText(table.file, column, way, batches, sink);
    case "parquet":
      return (await import("./flag-parquet.ts")).copyFlaggingParquet(table.file, column, way, batches, sink);
    case "arrow":
      return (await import("./flag-arrow.ts")).copyFlaggingArrow(table.file, column, way, batches, sink);
  }
}
