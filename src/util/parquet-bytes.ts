/** A table as a Parquet file. What its columns mean goes with it, as metadata of the file. */
import { type BasicType, parquetWriteBuffer } from "hyparquet-writer";
import type { CellType, ColumnTable, NamedColumn } from "./column-table.ts";

const TYPES: Readonly<Record<CellType, BasicType>> = { integer: "INT32", number: "DOUBLE", text: "STRING" };

export function parquetBytes({ title, columns }: ColumnTable): Uint8Array {
  const buffer = parquetWriteBuffer({
    columnData: columns.map((column) => ({
      name: column.name,
      // Every column may have missing cells, so that the schema does not depend on whether there are any.
      data: Array.from(column.values),
      type: TYPES[column.type],
      nullable: true,
    })),
    kvMetadata: [{ key: "title", value: title }, ...columns.map(meaningOf)],
    createdBy: "visvet",
  });
  return new Uint8Array(buffer);
}

function meaningOf({ name, unit, meaning }: NamedColumn): { key: string; value: string } {
  return { key: `column.${name}`, value: unit === "" ? meaning : `${meaning} (${unit})` };
}
