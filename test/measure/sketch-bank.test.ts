import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { sharingLadder } from "../../src/measure/sharing-ladder.ts";
import { SketchBank } from "../../src/measure/sketch-bank.ts";

const ONE = { subbands: 1, channels: 1, polarizations: 1 };
const ROOM = 1e9;

/** A float32 rounds a number by at most this. */
const FLOAT32 = 2 ** -24;

function bankOf(values: readonly number[], mantissaBits = 5): SketchBank {
  const bank = new SketchBank(sharingLadder(ONE), mantissaBits, ROOM, 1);
  const bits = new Int32Array(Float32Array.from(values).buffer);
  for (let i = 0; i < bits.length; i++) bank.add(0, bits, i);
  return bank;
}

/** The order statistic that a quantile stands for. */
function exact(values: readonly number[], share: number): number {
  return [...values].sort((a, b) => a - b)[Math.floor(share * (values.length - 1))]!;
}

// Every normal float32: from 1.2e-38 to 3.4e38.
const anySize = fc
  .tuple(fc.double({ min: -126, max: 127, noNaN: true }), fc.double({ min: 1, max: 1.99, noNaN: true }))
  .map(([exponent, mantissa]) => Math.fround(2 ** Math.floor(exponent) * mantissa));
const share = fc.double({ min: 0, max: 1, noNaN: true });

describe("SketchBank", () => {
  it.each([4, 5, 6])(
    "gives any quantile of numbers of any size within its relative error: 2^%i buckets",
    (bits) => {
      fc.assert(
        fc.property(fc.array(anySize, { minLength: 1, maxLength: 200 }), share, (values, q) => {
          const bank = bankOf(values, bits);
          // Half a bucket: edges are at most as 1 + 2^-bits to 1.
          expect(bank.relativeError).toBeCloseTo(1 / (2 ** (bits + 1) + 1), 12);
          const truth = exact(values, q);
          expect(Math.abs(bank.quantile(0, 0, q) / truth - 1)).toBeLessThanOrEqual(
            bank.relativeError + FLOAT32,
          );
          expect(Math.abs(bank.smoothQuantile(0, 0, q) / truth - 1)).toBeLessThanOrEqual(
            2 ** -bits + FLOAT32,
          );
        }),
      );
    },
  );

  it("is far nearer by rank inside the bucket where numbers are many", () => {
    // Rayleigh numbers at evenly spaced shares; their median is sqrt(2 ln 2).
    const values = Array.from({ length: 20001 }, (_, i) => Math.sqrt(-2 * Math.log(1 - (i + 0.5) / 20001)));
    const truth = Math.sqrt(2 * Math.log(2));
    expect(Math.abs(bankOf(values, 6).smoothQuantile(0, 0, 0.5) / truth - 1)).toBeLessThan(2e-4);
  });

  const NASTY: Record<string, { values: number[]; median: number }> = {
    "one number": { values: [7.25], median: 7.25 },
    "all equal": { values: new Array(100).fill(3), median: 3 },
    "a huge offset": { values: [1e30, 1e30, 1.5], median: 1e30 },
    "a lone giant": { values: [1, 1, 1, 1, 1e38], median: 1 },
    "a majority of giants": { values: [1, 1e20, 1e20], median: 1e20 },
    "the largest float32": { values: [3.4028234663852886e38], median: 3.4028234663852886e38 },
    "the smallest normal float32": { values: [2 ** -126], median: 2 ** -126 },
  };
  it.each(Object.entries(NASTY))("keeps its word on %s", (_, { values, median }) => {
    const bank = bankOf(values);
    expect(Math.abs(bank.quantile(0, 0, 0.5) / median - 1)).toBeLessThanOrEqual(bank.relativeError + FLOAT32);
  });

  it("says 0 of zeros and of what float32 hardly tells from them", () => {
    expect(bankOf([0, 0, 1]).quantile(0, 0, 0.5)).toBe(0);
    expect(bankOf([1e-44, 1e-44, 1]).quantile(0, 0, 0.5)).toBe(0);
  });

  it("says nothing of nothing, and leaves out what is no number", () => {
    const bank = new SketchBank(sharingLadder(ONE), 5, ROOM, 1);
    expect(bank.quantile(0, 0, 0.5)).toBeNaN();
    bank.add(0, Int32Array.of(-1), 0);
    expect(bank.count(0, 0)).toBe(0);
    expect(bank.quantile(3, 0, 0.5)).toBeNaN();
  });

  it("counts beyond 16 bits", () => {
    const bank = new SketchBank(sharingLadder(ONE), 5, ROOM, 1);
    const bits = new Int32Array(Float32Array.of(2, 4).buffer);
    for (let i = 0; i < 70_000; i++) bank.add(0, bits, 0);
    for (let i = 0; i < 150_000; i++) bank.add(0, bits, 1);
    expect(bank.count(0, 0)).toBe(220_000);
    expect(bank.quantile(0, 0, 0.3)).toBeCloseTo(2, 0);
    expect(bank.quantile(0, 0, 0.35)).toBeCloseTo(4, 0);
    const other = new SketchBank(sharingLadder(ONE), 5, ROOM, 1);
    for (let i = 0; i < 60_000; i++) other.add(0, bits, 0);
    bank.merge(other, [0]);
    expect(bank.count(0, 0)).toBe(280_000);
  });
});

const BAND = { subbands: 2, channels: 6, polarizations: 2 };
const SAMPLES = 24;
const OWNERS = 5;

interface Fed {
  readonly owner: number;
  readonly values: readonly number[];
}
const fed = fc.array(
  fc.record({
    owner: fc.nat(OWNERS - 1),
    values: fc.array(anySize, { minLength: SAMPLES, maxLength: SAMPLES }),
  }),
  { minLength: 1, maxLength: 12 },
);

function feed(rows: readonly Fed[], budget: number): SketchBank {
  const bank = new SketchBank(sharingLadder(BAND), 5, budget, 1);
  for (const { owner, values } of rows) bank.add(owner, new Int32Array(Float32Array.from(values).buffer), 0);
  return bank;
}

/** All that can be asked of a bank. */
function said(bank: SketchBank): unknown {
  const { sketch, sketches } = bank.map;
  const answers = [0, 1, 2, 3, 4].map((owner) =>
    Array.from({ length: sketches }, (_, k) => [
      bank.count(owner, k),
      ...[0, 0.25, 0.5, 1].map((q) => bank.quantile(owner, k, q)),
    ]),
  );
  return { sketch: [...sketch], answers };
}

describe("a bank short of memory", () => {
  it("shares sketches between neighbouring channels, then between all samples", () => {
    const maps = sharingLadder(BAND);
    expect(maps.map(({ sketches }) => sketches)).toEqual([24, 12, 8, 4, 1]);
    // Channels 0 and 1 of sub-band 0, first polarization, in one sketch; the other polarization in another.
    const { sketch } = maps[1]!;
    expect(sketch[0]).toBe(sketch[2]);
    expect(sketch[0]).not.toBe(sketch[1]);
    expect(sketch[0]).not.toBe(sketch[12]);
  });

  it("keeps every number however few sketches are left", () => {
    fc.assert(
      fc.property(fed, (rows) => {
        const bank = feed(rows, 1);
        expect(bank.map.sketches).toBe(1);
        for (let owner = 0; owner < OWNERS; owner++) {
          const own = rows.filter((row) => row.owner === owner);
          expect(bank.count(owner, 0)).toBe(own.length * SAMPLES);
          if (own.length === 0) continue;
          const truth = exact(
            own.flatMap(({ values }) => values),
            0.5,
          );
          const median = bank.quantile(owner, 0, 0.5);
          expect(Math.abs(median / truth - 1)).toBeLessThanOrEqual(bank.relativeError + FLOAT32);
        }
      }),
    );
  });

  // Budgets at which some inputs step down the ladder and some do not.
  it.each([1, 30_000, 60_000, 120_000, ROOM])(
    "is the same whatever way the rows are shared out, in whatever order: %i bytes",
    (budget) => {
      fc.assert(
        fc.property(fed, fc.nat(), fc.boolean(), (rows, cut, backward) => {
          const at = cut % (rows.length + 1);
          const early = feed(rows.slice(0, at), budget);
          const late = feed(backward ? rows.slice(at).reverse() : rows.slice(at), budget);
          if (backward) late.merge(early, [0, 1, 2, 3, 4]);
          else early.merge(late, [0, 1, 2, 3, 4]);
          expect(said(backward ? late : early)).toEqual(said(feed(rows, budget)));
        }),
      );
    },
  );

  it("renames owners as it merges", () => {
    const ours = feed([{ owner: 0, values: new Array(SAMPLES).fill(1) }], ROOM);
    const theirs = feed([{ owner: 0, values: new Array(SAMPLES).fill(64) }], ROOM);
    ours.merge(theirs, [3]);
    expect(ours.quantile(0, 0, 0.5)).toBeCloseTo(1, 1);
    expect(Math.abs(ours.quantile(3, 0, 0.5) / 64 - 1)).toBeLessThan(ours.relativeError + FLOAT32);
  });
});
