/** A table as an Arrow IPC file. Its fields carry their unit and meaning as metadata. */
import {
  type DataType,
  Field,
  Float64,
  Int32,
  makeData,
  RecordBatch,
  Schema,
  Struct,
  Table,
  tableToIPC,
  Utf8,
  vectorFromArray,
} from "apache-arrow";
import type { CellType, ColumnTable } from "./column-table.ts";

function typeOf(type: CellType): DataType {
  switch (type) {
    case "integer":
      return new Int32();
    case "number":
      return new Float64();
    case "text":
      return new Utf8();
  }
}

export function arrowBytes({ title, rows, columns }: ColumnTable): Uint8Array {
  const fields = columns.map(({ name, type, unit, meaning }) => {
    return new Field(name, typeOf(type), true, new Map(Object.entries({ unit, meaning })));
  });
  const schema = new Schema(fields, new Map([["title", title]]));
  const children = columns.map(({ values, type }) => {
    return vectorFromArray(Array.from(values), typeOf(type)).data[0]!;
  });
  const data = makeData({ type: new Struct(fields), length: rows, nullCount: 0, children });
  return tableToIPC(new Table(schema, [new RecordBatch(schema, data)]), "file");
}
