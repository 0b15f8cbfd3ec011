/** Reading in blocks over several tables: the same rows whatever is asked for, and no more bytes than are needed. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { ByteSource } from "../../../src/dataset/fits/byte-source.ts";
import { openFits } from "../../../src/dataset/fits/hdus.ts";
import { openSource } from "../../../src/dataset/fits/source.ts";
import { openFitsIdi } from "../../../src/dataset/fits-idi/open.ts";
import { mergedPieces, placeInPieces } from "../../../src/dataset/fits-rows/plan.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { fileMaker } from "../group-file.ts";
import {
  AXES,
  COLUMNS,
  frequency,
  geometry,
  primary,
  source,
  type UvSpec,
  usualTables,
  uvData,
} from "../idi-file.ts";
import { readAll } from "../read-all.ts";

const file = fileMaker();
const PER_ROW = 12;
const TOTAL = 37;

/** Rows of 5, none, 17 and 15. */
const parts = [5, 0, 17, 15];
const starts = parts.map((_, i) => parts.slice(0, i).reduce((sum, rows) => sum + rows, 0));
const bytes = Buffer.concat([
  primary,
  ...usualTables(),
  ...parts.map((rows, i) => uvData({ rows, firstRow: starts[i]! })),
]);
const dataset = await openDataset(file(bytes));
const all = await readAll(dataset);

describe("blocks", () => {
  it("hold every row once, in order, as one table would", async () => {
    const one = await openDataset(file(Buffer.concat([primary, ...usualTables(), uvData({ rows: TOTAL })])));
    expect(dataset.rows).toBe(TOTAL);
    expect(all).toEqual(await readAll(one));
    expect(dataset.summary).toEqual(one.summary);
  });

  it("give the rows asked for in blocks of any size, and nothing for none", async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.nat({ max: TOTAL }),
        fc.nat({ max: TOTAL }),
        fc.integer({ min: 1, max: 50 }),
        fc.constantFrom("rows" as const, "weights" as const, "samples" as const),
        async (a, b, blockRows, want) => {
          const [first, end] = a < b ? [a, b] : [b, a];
          const read = await readAll(dataset, { want, rows: [first, end], blockRows });
          expect(read.time).toEqual(all.time.slice(first, end));
          expect(read.u).toEqual(all.u.slice(first, end));
          const samples = (values: number[]) => values.slice(first * PER_ROW, end * PER_ROW);
          expect(read.real).toEqual(want === "samples" ? samples(all.real) : []);
          expect(read.weight).toEqual(want === "rows" ? [] : samples(all.weight));
        },
      ),
      { numRuns: 60 },
    );
  });

  it.each([
    [{ rows: [-1, 3] as const }, "rows -1 to 3"],
    [{ rows: [0, TOTAL + 1] as const }, "rows 0 to 38: the dataset has 37"],
    [{ blockRows: 0 }, "blockRows is 0"],
  ])("refuse the request %j", async (request, message) => {
    const first = dataset
      .blocks({ want: "rows", ...request })
      [Symbol.asyncIterator]()
      .next();
    await expect(first).rejects.toThrow(message);
  });

  it("may be left early and asked for again", async () => {
    for (let k = 0; k < 3; k++) {
      for await (const block of dataset.blocks({ want: "samples", rows: [4, 30], blockRows: 2 })) {
        expect([block.firstRow, block.rows]).toEqual([4, 1]);
        break;
      }
    }
  });
});

describe("the bytes that are read", () => {
  function counting(inner: ByteSource): { source: ByteSource; bytes: () => number } {
    let count = 0;
    const counted: ByteSource = {
      path: inner.path,
      bytesOnDisk: inner.bytesOnDisk,
      sequential: inner.sequential,
      cursor: async (from) => {
        const cursor = await inner.cursor(from);
        return {
          reach: (at) => cursor.reach(at),
          close: () => cursor.close(),
          read: async (into, at) => {
            count += into.length;
            return cursor.read(into, at);
          },
        };
      },
    };
    return { source: counted, bytes: () => count };
  }

  const wide = { ...AXES.freq, length: 10_000 };
  const small = Object.fromEntries(
    Object.entries(COLUMNS).map(([name, column]) => [name, name === "WEIGHT" ? undefined : column]),
  );
  const names = Object.keys(COLUMNS);
  const gone = Object.fromEntries(names.map((name) => [name, undefined]));
  const weight = { WEIGHT: { form: "1E", cell: (row: number) => row + 1 } };
  const noneOfThem = { ...gone, WEIGHT: undefined };
  const frame: Partial<UvSpec> = { rows: 9, axes: [AXES.complex, wide], stored: (row) => row };
  const ROW_COLUMNS = 5 * 8 + 5 * 4;

  async function opened(spec: Partial<UvSpec>) {
    const tables = [geometry(), frequency({ offsets: [[0]] }), source()];
    const { source: counted, bytes: read } = counting(
      await openSource(file(Buffer.concat([primary, ...tables, uvData({ ...frame, ...spec })]))),
    );
    return { dataset: await openFitsIdi(await openFits(counted)), read };
  }

  it.each([
    ["before the matrix", { columns: { ...small, ...weight } }, 4],
    ["after the matrix", { columns: noneOfThem, columnsAfter: { ...small, ...weight } }, 4],
    ["on both sides of it", { columns: { ...small, WEIGHT: undefined }, columnsAfter: weight }, 4],
  ])("are the columns alone where they stand %s", async (_, spec, weightBytes) => {
    const { dataset: wideDataset, read } = await opened(spec);
    expect(read()).toBeLessThan(60_000);
    let before = read();
    const rows = await readAll(wideDataset, { want: "rows", blockRows: 4 });
    expect(read() - before).toBe(9 * ROW_COLUMNS);
    before = read();
    const weights = await readAll(wideDataset, { want: "weights", blockRows: 4 });
    expect(read() - before).toBe(9 * (ROW_COLUMNS + weightBytes));
    before = read();
    const samples = await readAll(wideDataset, { want: "samples" });
    expect(read() - before).toBe(9 * (ROW_COLUMNS + weightBytes + 80_000));
    expect(rows).toEqual({ ...samples, real: [], imag: [], weight: [] });
    expect(weights.weight).toEqual(samples.weight);
    expect(samples.weight[8 * 10_000 + 77]).toBe(9);
    expect(samples.real[8 * 10_000 + 77]).toBe(8);
  });

  it("are the matrix too where the weights stand in it, and no other wide column", async () => {
    const { dataset: wideDataset, read } = await opened({
      axes: [AXES.weighted, wide],
      columns: {
        ...small,
        WEIGHT: undefined,
        SPARE: { form: "20000E", cell: () => new Float32Array(20_000) },
      },
    });
    const before = read();
    const { weight: weights } = await readAll(wideDataset, { want: "weights" });
    expect(read() - before).toBe(9 * (ROW_COLUMNS + 120_000));
    expect(weights).toEqual((await readAll(wideDataset)).weight);
    expect(weights[8 * 10_000 + 5]).toBe(8);
  });

  it("are not read again for a summary that is known", async () => {
    const path = file(bytes);
    const { source: counted, bytes: read } = counting(await openSource(path));
    const known = await openFitsIdi(await openFits(counted), structuredClone(dataset.summary));
    const headers = read();
    expect(known.summary).toEqual(dataset.summary);
    const again = counting(await openSource(path));
    await openFitsIdi(await openFits(again.source));
    expect(again.bytes()).toBeGreaterThan(headers);
    expect(await readAll(known)).toEqual(all);
  });
});

describe("pieces of a row", () => {
  it("join where little lies between them", () => {
    const far = 200_000;
    expect(
      mergedPieces([
        { offset: far, bytes: 8 },
        { offset: 16, bytes: 8 },
        { offset: 0, bytes: 8 },
        { offset: far + 4, bytes: 8 },
      ]),
    ).toEqual([
      { offset: 0, bytes: 24 },
      { offset: far, bytes: 12 },
    ]);
  });

  it("say where a byte of the row is found", () => {
    const pieces = [
      { offset: 10, bytes: 5 },
      { offset: 100, bytes: 20 },
    ];
    expect([10, 14, 100, 119].map((byte) => placeInPieces(pieces, byte))).toEqual([0, 4, 5, 24]);
    expect(() => placeInPieces(pieces, 120)).toThrow(RangeError);
  });
});
