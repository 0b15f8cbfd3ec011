import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import {
  CompressionType,
  compressionRegistry,
  Dictionary,
  Field,
  FixedSizeList,
  Float32,
  Int8,
  RecordBatchFileWriter,
  RecordBatchStreamWriter,
  Table,
  Utf8,
  vectorFromArray,
} from "apache-arrow";
import { afterAll, describe, expect, it } from "vitest";
import { openColumnar } from "../../../src/dataset/columnar/open.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { readAll } from "../../support/read-all.ts";
import { lineOfError } from "../read-all.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-test-arrow-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const ROWS = 3000;
const each = (cell: (i: number) => number) => Float64Array.from({ length: ROWS }, (_, i) => cell(i));

/** A channel a row; names of polarizations in a dictionary; an empty value in every tenth row. */
function table(): Table {
  return new Table({
    mjd: vectorFromArray(each((i) => 60_000 + Math.floor(i / 30) / 8640)),
    ant1: vectorFromArray(Array.from({ length: ROWS }, () => "N")),
    ant2: vectorFromArray(Array.from({ length: ROWS }, (_, i) => ["E", "W", "S"][Math.floor(i / 10) % 3]!)),
    u_m: vectorFromArray(each((i) => Math.floor(i / 10))),
    v_m: vectorFromArray(each(() => 3)),
    w_m: vectorFromArray(each(() => 4)),
    freq_ghz: vectorFromArray(each((i) => 1 + (i % 10) / 1000)),
    pol: vectorFromArray(
      Array.from({ length: ROWS }, () => "LL"),
      new Dictionary(new Utf8(), new Int8()),
    ),
    re: vectorFromArray(
      Array.from({ length: ROWS }, (_, i) => (i % 10 === 3 ? null : i)),
      new Float32(),
    ),
    im: vectorFromArray(each((i) => -i)),
  });
}

/** Literal blocks in a frame: the least that is ZSTD (RFC 8878, sections 3.1.1 and 3.1.1.2). */
function storedZstd(bytes: Uint8Array): Uint8Array {
  const parts = [Buffer.from([0x28, 0xb5, 0x2f, 0xfd, 0xa0]), Buffer.alloc(4)];
  parts[1]!.writeUInt32LE(bytes.length);
  for (let at = 0; at === 0 || at < bytes.length; at += 100_000) {
    const block = bytes.subarray(at, at + 100_000);
    const header = (block.length << 3) | (at + 100_000 >= bytes.length ? 1 : 0);
    parts.push(Buffer.from([header & 255, (header >> 8) & 255, header >> 16]), Buffer.from(block));
  }
  return Buffer.concat(parts);
}

/** As much of an LZ4 frame as tells that it is one (LZ4 frame format 1.6.1: magic, version 01). */
function asLz4(bytes: Uint8Array): Uint8Array {
  return Buffer.concat([Buffer.from([4, 34, 77, 24, 0x60, 0x40, 0x82]), bytes]);
}

async function expectRead(path: string): Promise<void> {
  const dataset = await openDataset(path);
  expect(dataset.shape).toEqual({ subbands: 1, channels: 10, polarizations: 1 });
  expect(dataset.array.antennas.map(({ name }) => name)).toEqual(["E", "N", "S", "W"]);
  const all = await readAll(dataset);
  expect(all.rows).toBe(300);
  expect([...all.imag.subarray(10, 20)]).toEqual(
    [-10, -11, -12, -13, -14, -15, -16, -17, -18, -19].map((v, i) => (i === 3 ? 0 : v)),
  );
  expect([...all.weight.subarray(10, 20)]).toEqual([1, 1, 1, 0, 1, 1, 1, 1, 1, 1]);
}

describe("Arrow IPC", () => {
  it("is read with lists of a fixed size", async () => {
    const path = join(folder, "fixed.arrow");
    const item = new Field("item", new Float32(), true);
    const lists = (cells: (number | null)[][]) => vectorFromArray(cells, new FixedSizeList(2, item));
    const one = (value: number) => vectorFromArray(Float64Array.of(value, value));
    const made = new Table({
      mjd: one(60_000),
      ant1: vectorFromArray(Int32Array.of(1, 1)),
      ant2: vectorFromArray(BigInt64Array.of(2n, 3n)),
      u_m: one(1),
      v_m: one(2),
      w_m: one(3),
      freq_ghz: one(1.4),
      re: lists([
        [1, 2],
        [3, null],
      ]),
      im: lists([
        [0, 0],
        [0, 0],
      ]),
    });
    writeFileSync(path, RecordBatchFileWriter.writeAll(made).toUint8Array(true));
    const map = join(folder, "fixed.yaml");
    writeFileSync(map, "constants: { polarizations: [XX, YY], channel_width: 1MHz }\n");
    const all = await readAll(await openColumnar([path], { columnMap: map }));
    expect([...all.antenna2]).toEqual([2, 3]);
    expect([...all.real]).toEqual([1, 2, 3, 0]);
    expect([...all.weight]).toEqual([1, 1, 1, 0]);
  });

  it("is read as a file", async () => {
    const path = join(folder, "a.arrow");
    writeFileSync(path, RecordBatchFileWriter.writeAll(table()).toUint8Array(true));
    await expectRead(path);
  });

  it("is read as a stream", async () => {
    const path = join(folder, "a.arrows");
    writeFileSync(path, RecordBatchStreamWriter.writeAll(table()).toUint8Array(true));
    await expectRead(path);
  });

  it("is read with ZSTD bodies, and refused with LZ4 ones", async () => {
    for (const [type, encode, name] of [
      [CompressionType.ZSTD, storedZstd, "zstd"],
      [CompressionType.LZ4_FRAME, asLz4, "lz4"],
    ] as const) {
      const before = compressionRegistry.get(type);
      compressionRegistry.set(type, { encode });
      const writer = new RecordBatchFileWriter({ compressionType: type });
      writeFileSync(join(folder, `${name}.arrow`), writer.writeAll(table()).toUint8Array(true));
      compressionRegistry.set(type, before as never);
    }
    await expectRead(join(folder, "zstd.arrow"));
    expect(await lineOfError(openColumnar([join(folder, "lz4.arrow")]))).toContain(
      "compressed with LZ4, which is not read",
    );
  });

  it("ends in the middle: named", async () => {
    const bytes = RecordBatchStreamWriter.writeAll(table()).toUint8Array(true);
    const path = join(folder, "cut.arrows");
    for (const share of [0.2, 0.6, 0.95]) {
      writeFileSync(path, bytes.subarray(0, Math.floor(bytes.length * share)));
      expect(await lineOfError(openColumnar([path]))).toMatch(/damaged|ends/);
    }
  });
});
