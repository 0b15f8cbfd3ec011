/** Reading in blocks: which bytes are read for a request, and that it does not matter how the rows are shared out. */
import { truncateSync } from "node:fs";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { ByteSource } from "../../../src/dataset/fits/byte-source.ts";
import { openFits } from "../../../src/dataset/fits/hdus.ts";
import { openSource } from "../../../src/dataset/fits/source.ts";
import { groupsHeader } from "../../../src/dataset/fits/write.ts";
import { blockRange, MOST_BLOCK_BYTES, planReads } from "../../../src/dataset/fits-rows/plan.ts";
import { Notes } from "../../../src/dataset/notes.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { groupLayout } from "../../../src/dataset/random-groups/layout.ts";
import { openRandomGroups } from "../../../src/dataset/random-groups/open.ts";
import { groupStore, sampleLayout } from "../../../src/dataset/random-groups/row-store.ts";
import { memorySource } from "../fits/memory-cursor.ts";
import {
  antennaTable,
  COMPLEX,
  DEC,
  fileMaker,
  freq,
  type GroupFileSpec,
  groupFile,
  plainSpec,
  RA,
  stokes,
} from "../group-file.ts";
import { lineOfError, readAll } from "../read-all.ts";

const file = fileMaker();

const many: Partial<GroupFileSpec> = { rows: 37 };
const dataset = await openDataset(file(groupFile(many)));
const all = await readAll(dataset);

async function blockSizes(blockRows: number): Promise<number[]> {
  const sizes: number[] = [];
  for await (const block of dataset.blocks({ want: "rows", blockRows })) sizes.push(block.rows);
  return sizes;
}

describe("blocks", () => {
  it("give the same rows whatever their size", async () => {
    await fc.assert(
      fc.asyncProperty(fc.integer({ min: 1, max: 50 }), async (blockRows) => {
        const read = await readAll(dataset, { want: "samples", blockRows });
        expect(read).toEqual(all);
        expect(await blockSizes(blockRows)).toHaveLength(Math.ceil(37 / blockRows));
      }),
      { numRuns: 25 },
    );
  });

  it("give the rows asked for, and nothing for none", async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.nat({ max: 37 }),
        fc.nat({ max: 37 }),
        fc.integer({ min: 1, max: 9 }),
        async (a, b, blockRows) => {
          const [first, end] = a < b ? [a, b] : [b, a];
          const read = await readAll(dataset, { want: "samples", rows: [first, end], blockRows });
          expect(read.time).toEqual(all.time.slice(first, end));
          expect(read.u).toEqual(all.u.slice(first, end));
          expect(read.real).toEqual(all.real.slice(first * 12, end * 12));
        },
      ),
      { numRuns: 40 },
    );
  });

  it("convert only what is asked for", async () => {
    const rows = await readAll(dataset, { want: "rows" });
    expect(rows).toEqual({ ...all, real: [], imag: [], weight: [] });
    const weights = await readAll(dataset, { want: "weights" });
    expect(weights).toEqual({ ...all, real: [], imag: [] });
  });

  it("are one set of buffers a call, and two calls do not share them", async () => {
    const one = dataset.blocks({ want: "samples", blockRows: 4 })[Symbol.asyncIterator]();
    const two = dataset.blocks({ want: "samples", blockRows: 4 })[Symbol.asyncIterator]();
    const first = (await one.next()).value!;
    const other = (await two.next()).value!;
    expect(first.real).not.toBe(other.real);
    expect([...first.u.subarray(0, 4)]).toEqual(all.u.slice(0, 4));
    const second = (await one.next()).value!;
    expect(second).toBe(first);
    expect([...second.u.subarray(0, 4)]).toEqual(all.u.slice(4, 8));
    expect([...other.u.subarray(0, 4)]).toEqual(all.u.slice(0, 4));
    await one.return?.();
    await two.return?.();
  });

  it("may be left early and asked for again", async () => {
    for (let k = 0; k < 3; k++) {
      for await (const block of dataset.blocks({ want: "samples", blockRows: 2 })) {
        expect(block.firstRow).toBe(0);
        break;
      }
    }
  });

  it.each([
    [{ rows: [-1, 3] as const }, "rows -1 to 3"],
    [{ rows: [5, 3] as const }, "rows 5 to 3"],
    [{ rows: [0, 38] as const }, "rows 0 to 38: the dataset has 37"],
    [{ rows: [0.5, 3] as const }, "expected a range of whole numbers"],
    [{ blockRows: 0 }, "blockRows is 0"],
  ])("refuse the request %j", async (request, message) => {
    const first = dataset
      .blocks({ want: "rows", ...request })
      [Symbol.asyncIterator]()
      .next();
    await expect(first).rejects.toThrow(message);
  });

  it("say so when the file became shorter while it was read", async () => {
    const path = file(groupFile({ rows: 37, tables: [], axes: [COMPLEX, stokes(2), freq(3)] }));
    const opened = await openDataset(path);
    truncateSync(path, groupsHeader({ ...plainSpec, groups: 37 }).length + 100);
    expect(await lineOfError(readAll(opened, { want: "rows", blockRows: 1 }))).toContain(
      "The file became shorter while it was read: wait until it is written",
    );
  });
});

describe("planReads", () => {
  /** The layout of a header alone: no data are needed to plan. */
  async function layoutOf(channels: number, groups: number) {
    const header = groupsHeader({
      ...plainSpec,
      axes: [COMPLEX, stokes(4), freq(channels), RA, DEC],
      groups,
    });
    const groupBytes = 4 * (6 + 12 * channels);
    // Bytes that read as zero and are not there.
    const source = memorySource(header);
    const endless: ByteSource = {
      ...source,
      cursor: async () => ({
        ...(await source.cursor()),
        reach: async (at) => Math.min(at, header.length + groups * groupBytes),
      }),
    };
    const { hdus } = await openFits(endless);
    const layout = groupLayout(hdus[0], new Notes());
    return {
      layout: groupStore(layout),
      shape: sampleLayout(layout).shape,
      start: header.length,
      groupBytes,
    };
  }

  it("covers each byte of the groups asked for once, and no other", async () => {
    const { layout, shape, start, groupBytes } = await layoutOf(64, 1000);
    const plan = planReads(layout, shape, { want: "samples", rows: [10, 990], blockRows: 100 });
    let expected = start + 10 * groupBytes;
    for (let row = plan.firstRow; row < plan.endRow; row += plan.blockRows) {
      const range = blockRange(layout, plan, row);
      expect([range.byte, range.firstRow]).toEqual([expected, row]);
      expected += range.bytes;
    }
    expect(expected).toBe(start + 990 * groupBytes);
  });

  it("keeps blocks below 16 MB whatever is asked for, down to a row at a time", async () => {
    for (const channels of [1, 100, 10_000, 400_000]) {
      const { layout, shape, groupBytes } = await layoutOf(channels, 100_000);
      for (const want of ["weights", "samples"] as const) {
        const { blockRows } = planReads(layout, shape, { want, blockRows: 1_000_000 });
        expect(blockRows).toBeGreaterThanOrEqual(1);
        if (blockRows > 1) expect(blockRows * groupBytes).toBeLessThanOrEqual(MOST_BLOCK_BYTES);
      }
    }
  });

  it("reads only the parameters for rows of large groups, and whole blocks of small ones", async () => {
    const large = await layoutOf(10_000, 50);
    expect(planReads(large.layout, large.shape, { want: "rows" })).toMatchObject({
      rowBytes: 24,
      scattered: true,
    });
    expect(planReads(large.layout, large.shape, { want: "samples" }).scattered).toBe(false);
    const small = await layoutOf(4, 50);
    expect(planReads(small.layout, small.shape, { want: "rows" }).scattered).toBe(false);
  });
});

describe("the bytes that are read", () => {
  /** `source` that counts what goes through it. */
  function counting(source: ByteSource): { source: ByteSource; bytes: () => number } {
    let bytes = 0;
    const counted: ByteSource = {
      ...source,
      path: source.path,
      bytesOnDisk: source.bytesOnDisk,
      sequential: source.sequential,
      cursor: async (from) => {
        const cursor = await source.cursor(from);
        return {
          reach: (at) => cursor.reach(at),
          close: () => cursor.close(),
          read: async (into, at) => {
            bytes += into.length;
            return cursor.read(into, at);
          },
        };
      },
    };
    return { source: counted, bytes: () => bytes };
  }

  it("for rows of large groups are their parameters alone", async () => {
    const bytes = groupFile({
      rows: 40,
      axes: [COMPLEX, stokes(4), freq(2000), RA, DEC],
      stored: (row) => row + 1,
      tables: [antennaTable()],
    });
    const { source, bytes: read } = counting(await openSource(file(bytes)));
    const opened = await openRandomGroups(await openFits(source));
    // Headers and tables, and 24 bytes of each group of 96 kB.
    expect(read()).toBeLessThan(20_000);
    const before = read();
    const rows = await readAll(opened, { want: "rows" });
    expect(read() - before).toBe(40 * 24);
    expect(rows.u).toEqual(Array.from({ length: 40 }, (_, row) => (row + 1) * 1e-9));
    const samples = await readAll(opened, { want: "samples", rows: [39, 40] });
    expect(samples.real[0]).toBe(40);
    expect(read() - before).toBe(40 * 24 + 24 + 96_000);
  });

  it("are not read again for a summary that is known", async () => {
    const path = file(groupFile(many));
    const first = await openDataset(path);
    const { source, bytes } = counting(await openSource(path));
    const known = await openRandomGroups(await openFits(source), structuredClone(first.summary));
    expect(bytes()).toBeLessThan(3 * 2880 + 3 * 2880);
    expect(known.summary).toEqual(first.summary);
    expect(await readAll(known)).toEqual(all);
  });
});
