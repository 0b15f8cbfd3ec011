/** The compiled kernel against its plain twin, to the last bit, on samples of every kind and size. */
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { AUTOCORRELATION, KINDS, SUMS } from "../../../src/measure/kernels/layout.ts";
import { type PrepareKernels, plainPrepare } from "../../../src/measure/kernels/prepare.ts";
import { compiledKernels } from "../../../src/util/kernels/compiled.ts";
import { Arena, kernelMemory } from "../../../src/util/kernels/memory.ts";

const { NaN: NAN, POSITIVE_INFINITY: INF } = Number;
const usual = fc.float({ min: -100, max: 100, noNaN: true });
const odd = fc.constantFrom(NAN, INF, -INF, 0, -0, 1e-45, -1e-30, 3e38, -1e25);
const weight = fc.oneof(
  { weight: 8, arbitrary: fc.float({ min: Math.fround(1e-3), max: 1e4, noNaN: true }) },
  { weight: 1, arbitrary: fc.constantFrom(NAN, INF, -INF, 0, -0, -2.5, -3e38, 1e-45, 3e38) },
);
/** Mostly all usable; often a few that are not; now and then sizes beyond float32 products. */
const block = fc
  .record({
    rows: fc.integer({ min: 1, max: 4 }),
    subbands: fc.integer({ min: 1, max: 2 }),
    channels: fc.oneof(fc.integer({ min: 1, max: 9 }), fc.constantFrom(16, 17, 64, 65, 129)),
    polarizations: fc.constantFrom(1, 2, 4),
    odds: fc.constantFrom(0, 0, 1, 6),
    seed: fc.nat(),
  })
  .chain((shape) => {
    const samples = shape.rows * shape.subbands * shape.channels * shape.polarizations;
    const places = fc.array(
      fc.record({
        at: fc.nat(samples - 1),
        re: fc.oneof(usual, odd),
        im: fc.oneof(usual, odd),
        w: weight,
      }),
      { maxLength: shape.odds * 4 },
    );
    return fc.record({ shape: fc.constant(shape), places });
  });

type Made = typeof block extends fc.Arbitrary<infer T> ? T : never;

/** All that a kernel leaves, as bits; what it did not write is zero. */
function run(kernels: PrepareKernels, { shape, places }: Made) {
  const { rows, subbands, channels, polarizations } = shape;
  const rowSamples = subbands * channels * polarizations;
  const samples = rows * rowSamples;
  const products = subbands * polarizations;
  const arena = new Arena();
  const [real, imag, w, bits] = [0, 1, 2, 3].map(() => arena.require(4 * samples)) as [
    number,
    number,
    number,
    number,
  ];
  const sums = arena.require(8 * rows * products * SUMS);
  const counts = arena.require(4 * rows * products * KINDS);
  const [baseline, sign, whole] = [arena.require(4 * rows), arena.require(rows), arena.require(rows)];
  const { f32, f64, i32, u8 } = kernelMemory.heap;
  let state = shape.seed;
  const random = () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state / 2 ** 31 - 1;
  };
  for (let i = 0; i < samples; i++) {
    f32[real / 4 + i] = 3 * random();
    f32[imag / 4 + i] = 3 * random();
    f32[w / 4 + i] = 1.5 + random();
  }
  for (const { at, re, im, w: weighs } of places) {
    f32[real / 4 + at] = re;
    f32[imag / 4 + at] = im;
    f32[w / 4 + at] = weighs;
  }
  i32.fill(0, bits / 4, bits / 4 + samples);
  f64.fill(0, sums / 8, sums / 8 + rows * products * SUMS);
  i32.fill(0, counts / 4, counts / 4 + rows * products * KINDS);
  u8.fill(0, whole, whole + rows);
  for (let row = 0; row < rows; row++) {
    i32[baseline / 4 + row] = row === 2 ? AUTOCORRELATION : row;
    u8[sign + row] = row % 2 === 0 ? 1 : 255;
  }
  const stops: number[] = [];
  for (let from = 0; from < rows; from++) {
    from = kernels.prepareRows(
      from,
      rows,
      subbands,
      channels,
      polarizations,
      real,
      imag,
      w,
      baseline,
      sign,
      bits,
      sums,
      counts,
      whole,
    );
    if (from === rows) break;
    stops.push(from);
    // Of such a row nothing is valid.
    i32.fill(0, bits / 4 + from * rowSamples, bits / 4 + (from + 1) * rowSamples);
    f64.fill(0, sums / 8 + from * products * SUMS, sums / 8 + (from + 1) * products * SUMS);
    i32.fill(0, counts / 4 + from * products * KINDS, counts / 4 + (from + 1) * products * KINDS);
  }
  const result = {
    stops,
    // Bits of a passed-over row are the reach of the row before it.
    bits: [...i32.slice(bits / 4, bits / 4 + samples)].filter((_, i) => Math.floor(i / rowSamples) !== 2),
    sums: [...f64.slice(sums / 8, sums / 8 + rows * products * SUMS)],
    counts: [...i32.slice(counts / 4, counts / 4 + rows * products * KINDS)],
    whole: [...u8.slice(whole, whole + rows)],
  };
  arena.release();
  return result;
}

describe("prepareRows", () => {
  it("compiled, does what its plain twin does, to the last bit", () => {
    let stopped = 0;
    let whole = 0;
    fc.assert(
      fc.property(block, (made) => {
        const plain = run(plainPrepare, made);
        stopped += plain.stops.length;
        whole += plain.whole.filter((is) => is === 1).length;
        expect(run(compiledKernels() as PrepareKernels, made)).toEqual(plain);
      }),
      { numRuns: 400 },
    );
    // The samples made must try the ways through it.
    expect(Math.min(stopped, whole)).toBeGreaterThan(50);
  });

  // Error bounds of summing: each of n - 1 rounded additions loses at most 2^-24 of the sum of magnitudes.
  it("sums to within 16 roundings of float32 of sums in float64", () => {
    const made: Made = {
      shape: { rows: 1, subbands: 1, channels: 1001, polarizations: 1, odds: 0, seed: 5 },
      places: [],
    };
    const { sums, bits } = run(plainPrepare, made);
    const amplitude = Float32Array.from(new Float32Array(Int32Array.from(bits).buffer));
    const exact = amplitude.reduce((sum, a) => sum + a, 0);
    expect(Math.abs(sums[2]! / exact - 1)).toBeLessThan(16 * 2 ** -24);
  });
});
