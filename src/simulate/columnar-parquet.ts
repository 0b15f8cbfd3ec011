/** Columns as Parquet, one row group a block: no more of the dataset than that is ever held. */
import { ByteWriter, type ColumnSource, ParquetWriter } from "hyparquet-writer";
import { MAP_KEY } from "../dataset/columnar/table.ts";
import type { SampleBlock } from "../dataset/dataset.ts";
import type { CellType, WrittenColumn, WrittenTable } from "./columnar-columns.ts";

type SchemaElement = ConstructorParameters<typeof ParquetWriter>[0]["schema"][number];

const TYPES: Readonly<Record<CellType, Partial<SchemaElement>>> = {
  double: { type: "DOUBLE" },
  single: { type: "FLOAT" },
  integer: { type: "INT32" },
  text: { type: "BYTE_ARRAY", converted_type: "UTF8" },
  flag: { type: "BOOLEAN" },
};

export class ParquetBlocks {
  readonly #table: WrittenTable;
  readonly #bytes = new ByteWriter();
  readonly #writer: ParquetWriter;

  /** @param mapText goes into the file's metadata */
  constructor(table: WrittenTable, mapText: string) {
    this.#table = table;
    this.#writer = new ParquetWriter({
      writer: this.#bytes,
      schema: schemaOf(table),
      kvMetadata: [{ key: MAP_KEY, value: mapText }],
      createdBy: "visvet",
    });
  }

  /** The bytes of the file up to and with this block. */
  async add(block: SampleBlock): Promise<Uint8Array> {
    const { columns, repeat } = this.#table;
    const rows = block.rows * repeat;
    const columnData = columns.map((column): ColumnSource => {
      return { name: column.name, data: dataOf(column, block, repeat) };
    });
    await this.#writer.write({ columnData, rowGroupSize: rows });
    return this.#drain();
  }

  async finish(): Promise<Uint8Array> {
    await this.#writer.finish();
    return this.#drain();
  }

  #drain(): Uint8Array {
    const bytes = this.#bytes.getBytes().slice();
    this.#bytes.index = 0;
    return bytes;
  }
}

function schemaOf({ columns }: WrittenTable): SchemaElement[] {
  const required = "REQUIRED" as const;
  return [
    { name: "visibilities", num_children: columns.length },
    ...columns.flatMap(({ name, type, listLength }): SchemaElement[] => {
      if (listLength === 0) return [{ name, repetition_type: required, ...TYPES[type] }];
      return [
        { name, repetition_type: required, num_children: 1, converted_type: "LIST" },
        { name: "list", repetition_type: "REPEATED", num_children: 1 },
        { name: "element", repetition_type: required, ...TYPES[type] },
      ];
    }),
  ];
}

function dataOf(column: WrittenColumn, block: SampleBlock, repeat: number): ColumnSource["data"] {
  const cells = column.cells(block);
  const { listLength, perRow, type } = column;
  const value = (i: number) => (type === "flag" ? cells[i] === 1 : cells[i]!);
  if (listLength > 0) {
    return Array.from({ length: block.rows }, (_, row) =>
      Array.from({ length: listLength }, (__, i) => value(row * listLength + i)),
    );
  }
  const rows = block.rows * repeat;
  return Array.from({ length: rows }, (_, i) => value(perRow ? Math.floor(i / repeat) : i));
}
