/** Columns as an Arrow IPC file, one record batch a block. */
import {
  Bool,
  type Data,
  type DataType,
  Field,
  Float32,
  Float64,
  Int32,
  List,
  makeData,
  RecordBatch,
  RecordBatchFileWriter,
  Schema,
  Struct,
  Utf8,
  vectorFromArray,
} from "apache-arrow";
import { MAP_KEY } from "../dataset/columnar/table.ts";
import type { SampleBlock } from "../dataset/dataset.ts";
import { TakenBytes } from "../util/taken-bytes.ts";
import type { CellType, WrittenColumn, WrittenTable } from "./columnar-columns.ts";

function scalarType(type: CellType): DataType {
  switch (type) {
    case "double":
      return new Float64();
    case "single":
      return new Float32();
    case "integer":
      return new Int32();
    case "text":
      return new Utf8();
    case "flag":
      return new Bool();
  }
}

function typeOf({ type, listLength }: WrittenColumn): DataType {
  return listLength === 0 ? scalarType(type) : new List(new Field("item", scalarType(type), false));
}

export class ArrowBlocks {
  readonly #table: WrittenTable;
  readonly #schema: Schema;
  readonly #taken = new TakenBytes();
  readonly #writer = new RecordBatchFileWriter();

  /** @param mapText goes into the schema's metadata */
  constructor(table: WrittenTable, mapText: string) {
    this.#table = table;
    const fields = table.columns.map((column) => new Field(column.name, typeOf(column), false));
    this.#schema = new Schema(fields, new Map([[MAP_KEY, mapText]]));
    this.#writer.reset(this.#taken);
  }

  /** The bytes of the file up to and with this block. */
  add(block: SampleBlock): Uint8Array {
    this.#writer.write(batchOf(this.#table, this.#schema, block));
    return this.#taken.take();
  }

  finish(): Uint8Array {
    this.#writer.finish();
    return this.#taken.take();
  }
}

function batchOf(table: WrittenTable, schema: Schema, block: SampleBlock): RecordBatch {
  const { columns, repeat } = table;
  const length = block.rows * repeat;
  const children = columns.map((column) => dataOf(column, block, repeat));
  const data = makeData({ type: new Struct(schema.fields), length, nullCount: 0, children });
  return new RecordBatch(schema, data);
}

function dataOf(column: WrittenColumn, block: SampleBlock, repeat: number): Data {
  const cells = column.cells(block);
  const { listLength, perRow, type } = column;
  if (listLength > 0) {
    const child = scalarData(type, cells, block.rows * listLength, (i) => i);
    const valueOffsets = Int32Array.from({ length: block.rows + 1 }, (_, row) => row * listLength);
    return makeData({
      type: new List(new Field("item", scalarType(type), false)),
      length: block.rows,
      nullCount: 0,
      valueOffsets,
      child,
    });
  }
  return scalarData(type, cells, block.rows * repeat, perRow ? (i) => Math.floor(i / repeat) : (i) => i);
}

function scalarData(
  type: CellType,
  cells: ArrayLike<number | string>,
  length: number,
  from: (i: number) => number,
): Data {
  const number = (_: unknown, i: number) => cells[from(i)] as number;
  switch (type) {
    case "double":
      return makeData({
        type: new Float64(),
        length,
        nullCount: 0,
        data: Float64Array.from({ length }, number),
      });
    case "single":
      return makeData({
        type: new Float32(),
        length,
        nullCount: 0,
        data: Float32Array.from({ length }, number),
      });
    case "integer":
      return makeData({ type: new Int32(), length, nullCount: 0, data: Int32Array.from({ length }, number) });
    case "text": {
      const texts = Array.from({ length }, (_, i) => String(cells[from(i)]));
      return vectorFromArray(texts, new Utf8()).data[0]!;
    }
    case "flag": {
      const flags = Array.from({ length }, (_, i) => cells[from(i)] === 1);
      return vectorFromArray(flags, new Bool()).data[0]!;
    }
  }
}
