/** An Arrow IPC file or stream copied batch by batch with one column changed; the other columns are handed on. */
import { open } from "node:fs/promises";
import {
  type Data,
  DataType,
  type Field,
  makeData,
  RecordBatch,
  RecordBatchFileWriter,
  RecordBatchReader,
  RecordBatchStreamWriter,
  Struct,
  vectorFromArray,
} from "apache-arrow";
import type { ByteSink } from "../../util/byte-sink.ts";
import { TakenBytes } from "../../util/taken-bytes.ts";
import { CannotHoldFlags } from "../cannot-hold.ts";
import { flaggedCell } from "./flag-parquet.ts";
import type { PlacedBatch } from "./flag-placer.ts";
import type { FlagWay } from "./flagged-cell.ts";

/** @throws CannotHoldFlags when the column is of a type that cannot be written as it was */
export async function copyFlaggingArrow(
  path: string,
  column: string,
  way: FlagWay,
  batches: AsyncIterable<PlacedBatch>,
  sink: ByteSink,
): Promise<void> {
  const handle = await open(path);
  const placed = batches[Symbol.asyncIterator]();
  try {
    const reader = await RecordBatchReader.from(handle);
    await reader.open();
    const { schema } = reader;
    const at = schema.fields.findIndex(({ name }) => name === column);
    requireType(schema.fields[at], column, way);
    const bytes = new TakenBytes();
    const writer = reader.isFile() ? new RecordBatchFileWriter() : new RecordBatchStreamWriter();
    writer.reset(bytes, schema);
    for (;;) {
      const next = await reader.next();
      if (next.done === true) break;
      const batch: RecordBatch = next.value;
      if (batch.numRows === 0) {
        writer.write(batch);
        continue;
      }
      const { value } = await placed.next();
      writer.write(withColumn(batch, at, columnData(schema.fields[at]!, value as PlacedBatch, way)));
      await sink.write(bytes.take());
    }
    writer.finish();
    await sink.write(bytes.take());
  } finally {
    await placed.return?.();
    await handle.close().catch(() => {});
  }
}

function withColumn(batch: RecordBatch, at: number, column: Data): RecordBatch {
  const { schema, numRows, data } = batch;
  const children = data.children.map((child, i) => (i === at ? column : child));
  const struct = makeData({ type: new Struct(schema.fields), length: numRows, nullCount: 0, children });
  return new RecordBatch(schema, struct);
}

function columnData(field: Field, { batch, length, taken }: PlacedBatch, way: FlagWay): Data {
  const cells = batch.column(field.name);
  const values = Array.from({ length: batch.rows }, (_, row) =>
    flaggedCell(cells[row], taken.subarray(row * length, (row + 1) * length), way),
  );
  return vectorFromArray(values, field.type).data[0]!;
}

function requireType(field: Field | undefined, column: string, way: FlagWay): void {
  const type: DataType | undefined = field?.type;
  const inner: DataType | undefined =
    type !== undefined && (DataType.isList(type) || DataType.isFixedSizeList(type))
      ? type.children[0]!.type
      : type;
  const isFloat = DataType.isFloat(inner) && inner.precision > 0;
  const isWhole = DataType.isInt(inner) && (way === "flag" || inner.isSigned);
  const isFlag = way === "flag" && DataType.isBool(inner);
  if (isFloat || isWhole || isFlag || DataType.isUtf8(inner)) return;
  throw new CannotHoldFlags(`column "${column}" is of type ${String(type)}`);
}
