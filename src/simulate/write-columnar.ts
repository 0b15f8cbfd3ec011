/** A dataset as a table of columns: Parquet, Arrow IPC, CSV or TSV by the suffix of the file's name. */
import { rm } from "node:fs/promises";
import { columnMapText } from "../dataset/columnar/map-text.ts";
import type { BlockRequest, Dataset, SampleBlock } from "../dataset/dataset.ts";
import { type ByteSink, openSink } from "../util/byte-sink.ts";
import { InputError } from "../util/errors.ts";
import { NewOutput } from "../util/new-output.ts";
import { writeTextFile } from "../util/write-file.ts";
import { rowFacts, samplesOf, type TableLayout, tableOf, type WrittenTable } from "./columnar-columns.ts";
import { headerText, linesOf, textUnits } from "./columnar-text.ts";

export type { TableLayout } from "./columnar-columns.ts";

export interface ColumnarWriteOptions {
  /**
   * "sample": one row a sample; "row": one row a baseline and time, its samples in lists. Default: rows of text are
   * samples, those of Parquet and Arrow are baselines and times. A sample that comes twice cannot be told in the first.
   */
  readonly layout?: TableLayout;
  /** default: refuse when the file is there */
  readonly overwrite?: boolean;
  /** rows of the dataset in a row group or record batch; default about 16 MB of samples */
  readonly blockRows?: number;
  /** called as rows are written */
  readonly onRows?: (done: number, of: number) => void;
}

const BLOCK_BYTES = 16 * 1024 * 1024;
const SUFFIX = /\.(parquet|arrow|csv|tsv)$/i;

/**
 * Parquet and Arrow carry their column map in their metadata; text has it beside, as `<name>.columns.yaml`.
 *
 * @throws InputError when a file of that name is there, or it cannot be written
 */
export async function writeColumnar(
  dataset: Dataset,
  path: string,
  options: ColumnarWriteOptions = {},
): Promise<void> {
  const suffix = SUFFIX.exec(path)?.[1]?.toLowerCase();
  if (suffix === undefined) {
    throw new InputError("no format has this suffix", { file: path }, "Use .parquet, .arrow, .csv or .tsv");
  }
  const text = suffix === "csv" || suffix === "tsv";
  const mapPath = path.replace(SUFFIX, ".columns.yaml");
  if (options.overwrite === true) {
    for (const old of text ? [path, mapPath] : [path]) await rm(old, { force: true });
  }
  const facts = await rowFacts(dataset);
  const units = text ? await textUnits(dataset, facts) : { time: { unit: "mjd" }, uvw: { unit: "s" } };
  const table = tableOf(dataset, facts, options.layout ?? (text ? "sample" : "row"), units);
  const mapOutput = text ? await NewOutput.begin(mapPath) : undefined;
  try {
    await writeWhole(dataset, path, table, suffix, options);
    if (mapOutput === undefined) return;
    await writeTextFile(mapOutput.file, columnMapText(table.map));
    await mapOutput.keepFile();
  } catch (error) {
    await mapOutput?.drop();
    throw error;
  }
}

async function writeWhole(
  dataset: Dataset,
  path: string,
  table: WrittenTable,
  suffix: string,
  options: ColumnarWriteOptions,
): Promise<void> {
  const output = await NewOutput.begin(path);
  const sink = await openSink(output.file, false, output.openFile);
  try {
    const blocks = blocksOf(dataset, options);
    if (suffix === "parquet") await writeParquet(blocks, table, sink);
    else if (suffix === "arrow") await writeArrow(blocks, table, sink);
    else await writeText(blocks, table, suffix === "tsv" ? "\t" : ",", sink);
    await sink.finish();
    await output.keepFile();
  } catch (error) {
    await sink.abandon();
    await output.drop();
    throw error;
  }
}

async function* blocksOf(dataset: Dataset, options: ColumnarWriteOptions): AsyncGenerator<SampleBlock> {
  const usual = Math.max(1, Math.floor(BLOCK_BYTES / (12 * samplesOf(dataset.shape))));
  const request: BlockRequest = { want: "samples", blockRows: options.blockRows ?? usual };
  for await (const block of dataset.blocks(request)) {
    yield block;
    options.onRows?.(block.firstRow + block.rows, dataset.rows);
  }
}

async function writeText(
  blocks: AsyncIterable<SampleBlock>,
  table: WrittenTable,
  delimiter: string,
  sink: ByteSink,
): Promise<void> {
  await sink.write(Buffer.from(headerText(table, delimiter), "utf8"));
  for await (const block of blocks) {
    for (const piece of linesOf(table, block, delimiter)) await sink.write(Buffer.from(piece, "utf8"));
  }
}

async function writeParquet(
  blocks: AsyncIterable<SampleBlock>,
  table: WrittenTable,
  sink: ByteSink,
): Promise<void> {
  const { ParquetBlocks } = await import("./columnar-parquet.ts");
  const parquet = new ParquetBlocks(table, columnMapText(table.map));
  for await (const block of blocks) await sink.write(await parquet.add(block));
  await sink.write(await parquet.finish());
}

async function writeArrow(
  blocks: AsyncIterable<SampleBlock>,
  table: WrittenTable,
  sink: ByteSink,
): Promise<void> {
  const { ArrowBlocks } = await import("./columnar-arrow.ts");
  const arrow = new ArrowBlocks(table, columnMapText(table.map));
  for await (const block of blocks) await sink.write(arrow.add(block));
  await sink.write(arrow.finish());
}
