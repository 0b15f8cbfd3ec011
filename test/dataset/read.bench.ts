/**
 * Reading in blocks against a bare read of the same bytes: 64 MB of float32 groups from the page cache, by the size of
 * a group. Then what the reader leaves open: how large blocks should be, and from which size of group on the arrays
 * should be skipped rather than read along when only rows are asked for.
 */
import { mkdtempSync, rmSync } from "node:fs";
import { open } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { bench, describe } from "vitest";
import type { BlockRequest, Dataset } from "../../src/dataset/dataset.ts";
import { bigEndian, FitsFileWriter, groupItems, groupsHeader } from "../../src/dataset/fits/write.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { writeFitsIdi } from "../../src/simulate/write-fits-idi.ts";
import { antennaTable, COMPLEX, DAY, DEC, freq, RA, stokes } from "./group-file.ts";

const BYTES = 64e6;
const folder = mkdtempSync(join(tmpdir(), "visvet-bench-"));
process.on("exit", () => rmSync(folder, { recursive: true, force: true }));

interface Written {
  readonly path: string;
  readonly groupBytes: number;
  readonly dataset: Dataset;
}

/** Groups of four products and `channels`; 28 antennas in time order. */
async function write(channels: number): Promise<Written> {
  const axes = [COMPLEX, stokes(4), freq(channels), RA, DEC];
  const parameters = ["UU", "VV", "WW", "BASELINE", "DATE"].map((name) => ({
    name,
    zero: name === "DATE" ? DAY + 2400000.5 : 0,
  }));
  const items = groupItems({ axes, parameters });
  const rows = Math.floor(BYTES / (4 * items));
  const path = join(folder, `${channels}.uvfits`);
  const writer = await FitsFileWriter.create(path);
  await writer.blocks(groupsHeader({ bitpix: -32, axes, parameters, groups: rows }));
  const together = Math.max(1, Math.floor(1e6 / (4 * items)));
  const groups = Float32Array.from({ length: together * items }, (_, i) => Math.sin(i) + 1.5);
  for (let row = 0; row < rows; row += together) {
    const count = Math.min(together, rows - row);
    for (let k = 0; k < count; k++) {
      const code = 256 * (1 + ((row + k) % 13)) + 14 + ((row + k) % 14);
      groups.set([1e-7, -2e-7, 3e-8, code, Math.floor((row + k) / 378) / 1e5], k * items);
    }
    await writer.data(bigEndian(groups.subarray(0, count * items)));
  }
  await writer.blocks(antennaTable());
  await writer.commit();
  return { path, groupBytes: 4 * items, dataset: await openDataset(path) };
}

async function bareRead(path: string, bytes = BYTES): Promise<void> {
  const handle = await open(path);
  const buffer = Buffer.alloc(1 << 20);
  let at = 0;
  for (;;) {
    const { bytesRead } = await handle.read(buffer, 0, buffer.length, at);
    if (bytesRead === 0) break;
    at += bytesRead;
  }
  await handle.close();
  if (at < bytes * 0.99) throw new Error(`${at} bytes read`);
}

async function readBlocks(dataset: Dataset, request: BlockRequest): Promise<void> {
  let rows = 0;
  for await (const block of dataset.blocks(request)) rows += block.rows;
  if (rows !== dataset.rows) throw new Error(`${rows} of ${dataset.rows} rows`);
}

const options = { time: 800, iterations: 10, warmupIterations: 2, warmupTime: 100 };

const usual = await write(64);
for (const { path, groupBytes, dataset } of [await write(1), usual, await write(1024)]) {
  describe(`64 MB in groups of ${groupBytes} bytes`, () => {
    bench("a bare read", () => bareRead(path), options);
    bench("blocks of samples", () => readBlocks(dataset, { want: "samples" }), options);
    bench("blocks of weights", () => readBlocks(dataset, { want: "weights" }), options);
    bench("blocks of rows", () => readBlocks(dataset, { want: "rows" }), options);
  });
}

/** The same samples in FITS-IDI, the weights in the matrix or, all 1, in a column. */
async function rewritten({ dataset }: Written, weights: "matrix" | "column"): Promise<Written> {
  const flat: Dataset = {
    ...dataset,
    async *blocks(request) {
      for await (const block of dataset.blocks(request)) {
        block.weight.fill(1);
        yield block;
      }
    },
  };
  const path = join(folder, `${weights}.idifits`);
  await writeFitsIdi(weights === "matrix" ? dataset : flat, path);
  return { path, groupBytes: 0, dataset: await openDataset(path) };
}

for (const weights of ["matrix", "column"] as const) {
  const { path, dataset } = await rewritten(usual, weights);
  describe(`the samples of 64 MB of random groups in FITS-IDI, weights in a ${weights}`, () => {
    bench("a bare read", () => bareRead(path, dataset.bytes), options);
    bench("blocks of samples", () => readBlocks(dataset, { want: "samples" }), options);
    bench(
      "blocks of samples from random groups",
      () => readBlocks(usual.dataset, { want: "samples" }),
      options,
    );
    bench("blocks of weights", () => readBlocks(dataset, { want: "weights" }), options);
    bench("blocks of rows", () => readBlocks(dataset, { want: "rows" }), options);
  });
}

describe("64 MB of samples in blocks of", () => {
  const { dataset, groupBytes } = usual;
  for (const megabytes of [0.25, 1, 4, 16]) {
    const blockRows = Math.floor((megabytes * 1e6) / groupBytes);
    bench(`${megabytes} MB`, () => readBlocks(dataset, { want: "samples", blockRows }), options);
  }
});

// Above 64 kB the reader skips the arrays: 1500 channels are read by parameters alone, 1300 whole.
for (const channels of [1300, 1500]) {
  const { path, groupBytes, dataset } = await write(channels);
  describe(`64 MB, rows alone, in groups of ${groupBytes} bytes`, () => {
    bench("a bare read of everything", () => bareRead(path), options);
    bench("blocks of rows", () => readBlocks(dataset, { want: "rows" }), options);
  });
}
