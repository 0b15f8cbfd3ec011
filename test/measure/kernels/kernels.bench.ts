/**
 * Each kernel of the survey, compiled, against its plain twin on the same 32768 samples: 128 rows of 64 channels and four
 * products, noise with a signal in two of them.
 */
import { bench, describe } from "vitest";
import {
  type CountKernels,
  entryOf,
  LINE,
  PAGES,
  plainCount,
} from "../../../src/measure/kernels/count-sketches.ts";
import { type DifferenceKernels, plainDifferences } from "../../../src/measure/kernels/differences.ts";
import { KINDS, SUMS } from "../../../src/measure/kernels/layout.ts";
import { type PrepareKernels, plainPrepare } from "../../../src/measure/kernels/prepare.ts";
import { type ByteOrderKernels, plainByteOrder } from "../../../src/util/kernels/byte-order.ts";
import { compiledKernels } from "../../../src/util/kernels/compiled.ts";
import { Arena, kernelMemory } from "../../../src/util/kernels/memory.ts";

type All = ByteOrderKernels & PrepareKernels & CountKernels & DifferenceKernels;
const KERNELS: readonly [string, All][] = [
  ["compiled", compiledKernels() as All],
  ["plain", { ...plainByteOrder, ...plainPrepare, ...plainCount, ...plainDifferences }],
];

const [ROWS, CHANNELS, PRODUCTS] = [128, 64, 4];
const SAMPLES = CHANNELS * PRODUCTS;
const arena = new Arena();
const samples = (bytes: number) => arena.require(bytes * ROWS * SAMPLES);
const [raw, real, imag, weight, bits, staged] = [12, 4, 4, 4, 4, 2].map(samples) as [
  number,
  number,
  number,
  number,
  number,
  number,
];
const sums = arena.require(8 * ROWS * PRODUCTS * SUMS);
const counts = arena.require(4 * ROWS * PRODUCTS * KINDS);
const [baseline, sign, whole] = [arena.require(4 * ROWS), arena.require(ROWS), arena.require(ROWS)];
const stride = SAMPLES + LINE;
const gathered = arena.require(2 * (stride * ROWS + LINE));
const PAGE_SHIFT = 7;
const CAPACITY = 1 + 8 * SAMPLES;
const [sketch, directory, pages] = [
  arena.require(4 * SAMPLES),
  arena.require(4 * PAGES * SAMPLES),
  arena.require(4),
];
const pageCounts = arena.require(CAPACITY * (2 << PAGE_SHIFT));
const differences = arena.require(4 * SAMPLES);

const { u8, u32, f32, i32 } = kernelMemory.heap;
let state = 20260611;
const random = () => {
  state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
  return (state + 1) / 2 ** 32;
};
const noise = () => 0.13 * Math.sqrt(-2 * Math.log(random())) * Math.cos(2 * Math.PI * random());
const view = new DataView(u8.buffer);
for (let i = 0; i < ROWS * SAMPLES; i++) {
  view.setFloat32(raw + 12 * i, (i % PRODUCTS < 2 ? 1 : 0) + noise());
  view.setFloat32(raw + 12 * i + 4, noise());
  view.setFloat32(raw + 12 * i + 8, 1);
}
u8.fill(1, sign, sign + ROWS);
i32.fill(0, baseline / 4, baseline / 4 + ROWS);
for (let i = 0; i < SAMPLES; i++) {
  u32[sketch / 4 + i] = 4 * PAGES * i;
  for (let slot = 0; slot < PAGES; slot++) {
    u32[directory / 4 + PAGES * i + slot] = entryOf(0, slot, PAGE_SHIFT);
  }
}
i32[pages / 4] = 1;

const split = (kernels: All) => kernels.splitTriples(raw, 12 * SAMPLES, ROWS, SAMPLES, real, imag, weight);
const prepare = (kernels: All) =>
  kernels.prepareRows(
    0,
    ROWS,
    1,
    CHANNELS,
    PRODUCTS,
    real,
    imag,
    weight,
    baseline,
    sign,
    bits,
    sums,
    counts,
    whole,
  );
const stage = (kernels: All, to: number, step: number) => {
  for (let row = 0; row < ROWS; row++) {
    kernels.stageBuckets(bits + 4 * row * SAMPLES, SAMPLES, to + 2 * row * step, 18);
  }
};
const count = (kernels: All) => {
  // Counts of 16 bits run over in a benchmark, which harms none.
  kernels.countSketches(
    gathered,
    ROWS,
    stride,
    SAMPLES,
    sketch,
    directory,
    pageCounts,
    PAGE_SHIFT,
    pages,
    CAPACITY,
    0,
    SAMPLES / LINE,
  );
};
const differ = (kernels: All) => {
  for (let row = 0; row < ROWS; row++) {
    const at = 4 * row * SAMPLES;
    kernels.fillDifferences(real + at, imag + at, bits + at, 1, CHANNELS, PRODUCTS, 1, 1, differences);
  }
};

const usual = KERNELS[0]![1];
split(usual);
if (prepare(usual) !== ROWS) throw new Error("samples are out of range");
stage(usual, gathered, stride);
if (f32[bits / 4]! !== Math.fround(f32[bits / 4]!)) throw new Error("no amplitude");

const WORK: readonly [string, (kernels: All) => void][] = [
  ["byte order", split],
  ["kinds, amplitudes and sums", prepare],
  ["buckets", (kernels) => stage(kernels, staged, SAMPLES)],
  ["counts of sketches", count],
  ["second differences", differ],
];
for (const [title, work] of WORK) {
  describe(`${title} of ${ROWS * SAMPLES} samples`, () => {
    for (const [name, kernels] of KERNELS) {
      bench(name, () => work(kernels), { time: 500, warmupTime: 200, warmupIterations: 20 });
    }
  });
}
