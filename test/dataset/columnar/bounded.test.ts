import { mkdtempSync, rmSync, statSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { openParquet } from "../../../src/dataset/columnar/parquet-table.ts";
import { openText } from "../../../src/dataset/columnar/text-table.ts";
import type { ByteSource } from "../../../src/dataset/fits/byte-source.ts";
import { openSource } from "../../../src/dataset/fits/source.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { writeColumnar } from "../../../src/simulate/write-columnar.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-test-bounded-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

interface Reads {
  largest: number;
  total: number;
}

/** The file, with its reads counted. */
async function counted(path: string): Promise<{ source: ByteSource; reads: Reads }> {
  const source = await openSource(path);
  const reads: Reads = { largest: 0, total: 0 };
  const cursor = async (from?: number) => {
    const inner = await source.cursor(from);
    return {
      ...inner,
      read: async (into: Uint8Array, at: number) => {
        const got = await inner.read(into, at);
        reads.largest = Math.max(reads.largest, got);
        reads.total += got;
        return got;
      },
    };
  };
  const { bytesOnDisk, sequential } = source;
  return { source: { path, bytesOnDisk, sequential, cursor }, reads };
}

describe("Reading a table", () => {
  const parquet = join(folder, "groups.parquet");
  beforeAll(async () => {
    await writeColumnar(await openDataset("sample-inputs/formats.uvfits"), parquet, { blockRows: 30 });
  });

  it("of Parquet takes a row group's columns at a time, and the bytes of the wanted columns alone", async () => {
    const size = statSync(parquet).size;
    const { source, reads } = await counted(parquet);
    const table = await openParquet(source);
    const footer = reads.total;
    reads.largest = 0;
    let rows = 0;
    let batches = 0;
    for await (const batch of table.batches(["time", "real"])) {
      expect(batch.column("real")).toHaveLength(batch.rows);
      expect(batch.column("real")[0]).toHaveLength(32);
      rows += batch.rows;
      batches += 1;
    }
    expect([rows, batches]).toEqual([1080, 36]);
    // A third of the samples and one of six columns of rows: less than half of the file.
    expect(reads.total - footer).toBeLessThan(size / 2);
    // One column of 30 rows of 32 single-precision numbers, and its page header.
    expect(reads.largest).toBeLessThan(30 * 32 * 4 + 200);
  });

  it("of text takes a quarter of a megabyte at a time, and gives it on before the next", async () => {
    const { source, reads } = await counted("sample-inputs/formats.csv");
    const table = await openText(source);
    // The names and the first rows: not the whole of 2.8 MB.
    expect(reads.total).toBeLessThan(1e6);
    reads.total = 0;
    const ahead: number[] = [];
    let rows = 0;
    for await (const batch of table.batches(["time", "real"])) {
      rows += batch.rows;
      // Bytes read and not yet given on; a row is 81 bytes on average.
      ahead.push(reads.total - rows * 81);
    }
    expect(rows).toBe(34_560);
    expect(reads.largest).toBe(256 * 1024);
    expect(Math.max(...ahead)).toBeLessThan(1.5e6);
  });
});
