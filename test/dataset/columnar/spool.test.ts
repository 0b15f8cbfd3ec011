import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import fc from "fast-check";
import { afterAll, describe, expect, it } from "vitest";
import { RowIndex } from "../../../src/dataset/columnar/row-index.ts";
import { spoolBlocks } from "../../../src/dataset/columnar/spool-blocks.ts";
import { SpoolWriter } from "../../../src/dataset/columnar/spool-writer.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-test-spool-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

const SAMPLES = 5;
const ROW = { u: 1, v: 2, w: 3, antenna1: 1, antenna2: 2, subarray: 1, field: 7, setup: 0, integration: 10 };

async function laid(order: readonly number[], rows: number, stretchRows: number) {
  const writer = new SpoolWriter(mkdtempSync(join(folder, "w")), SAMPLES, 12 * SAMPLES * stretchRows);
  for (let row = 0; row < rows; row++) writer.addRow({ ...ROW, time: row });
  let mostHeld = 0;
  for (const at of order) {
    writer.put(Math.floor(at / SAMPLES), at % SAMPLES, at, -at, at + 1);
    mostHeld = Math.max(mostHeld, writer.heldBytes);
  }
  return { counts: writer.finish(), mostHeld };
}

describe("Rows gathered in bounded memory", () => {
  it("hold every sample whatever the order and the stretch that is held", async () => {
    const rows = 17;
    const all = Array.from({ length: rows * SAMPLES }, (_, i) => i);
    await fc.assert(
      fc.asyncProperty(
        fc.shuffledSubarray(all, { minLength: all.length - 9 }),
        fc.integer({ min: 1, max: 30 }),
        async (order, stretchRows) => {
          const place = mkdtempSync(join(folder, "p"));
          const writer = new SpoolWriter(place, SAMPLES, 12 * SAMPLES * stretchRows);
          for (let row = 0; row < rows; row++) writer.addRow({ ...ROW, time: row });
          for (const at of order) writer.put(Math.floor(at / SAMPLES), at % SAMPLES, at, -at, at + 1);
          // The second time a sample comes it does not count.
          writer.put(Math.floor(order[0]! / SAMPLES), order[0]! % SAMPLES, 999, 999, 999);
          const counts = writer.finish();
          expect(counts).toEqual({ rows, missing: all.length - order.length, twice: 1 });
          const shape = { subbands: 1, channels: SAMPLES, polarizations: 1 };
          const there = new Set(order);
          for await (const block of spoolBlocks(
            { folder: place, rows, shape, gaps: true },
            { want: "samples" },
          )) {
            for (const at of all) {
              const here = there.has(at);
              const found = [block.real[at], block.imag[at], block.weight[at]];
              expect(found).toEqual(here ? [at, -at, at + 1] : [0, 0, 0]);
            }
            expect([...block.time.subarray(0, rows)]).toEqual(Array.from({ length: rows }, (_, i) => i));
          }
        },
      ),
      { numRuns: 15 },
    );
  });

  it("hold no more than a stretch and its log, however many rows there are", async () => {
    const sizes: number[] = [];
    for (const rows of [400, 4000]) {
      // Sample by sample over all rows: the most scattered order there is.
      const order = Array.from(
        { length: rows * SAMPLES },
        (_, i) => (i % rows) * SAMPLES + Math.floor(i / rows),
      );
      const { counts, mostHeld } = await laid(order, rows, 1000);
      expect(counts.missing).toBe(0);
      sizes.push(mostHeld);
    }
    expect(sizes[0]).toBe(12 * SAMPLES * 1000);
    // Three stretches of earlier rows have a log, each of one chunk of 4096 entries.
    expect(sizes[1]).toBe(12 * SAMPLES * 1000 + 3 * 4096 * 20);
  });
});

describe("The index of rows", () => {
  const key = (time: number, antenna2: number) => ({ time, antenna1: 1, antenna2, rest: 0 });
  const where = () => ({ file: "t.csv", row: 9 });

  it("finds a row again wherever it stands", () => {
    const index = new RowIndex();
    const keys = Array.from({ length: 20_000 }, (_, i) => key(Math.floor(i / 100) / 7, i % 100));
    for (const one of keys) expect(index.find(one, where)).toBe(-1);
    for (let i = 0; i < keys.length; i += 37) expect(index.find(keys[i]!, where)).toBe(i);
    expect(index.rows).toBe(20_000);
  });

  it("tells rows without a time by their baseline", () => {
    const index = new RowIndex();
    expect(index.find(key(Number.NaN, 2), where)).toBe(-1);
    expect(index.find(key(Number.NaN, 3), where)).toBe(-1);
    expect(index.find(key(Number.NaN, 2), where)).toBe(0);
  });

  it("goes on without end where times only rise, and remembers the latest", () => {
    const index = new RowIndex(64);
    for (let time = 0; time < 500; time++) {
      for (let antenna = 0; antenna < 9; antenna++) expect(index.find(key(time, antenna), where)).toBe(-1);
      for (let antenna = 0; antenna < 9; antenna++) {
        expect(index.find(key(time, antenna), where)).toBe(9 * time + antenna);
      }
    }
  });

  it("says how to sort a table that it would have to hold whole", () => {
    const index = new RowIndex(64);
    const fill = () => {
      for (let i = 0; i < 100; i++) index.find(key(i % 2 === 0 ? i : -i, 1), where);
    };
    expect(fill).toThrow("scattered over too many rows");
    const late = new RowIndex(64);
    for (let time = 0; time < 100; time++) late.find(key(time, 1), where);
    expect(() => late.find(key(0.5, 1), where)).toThrow("scattered over too many rows");
  });
});
