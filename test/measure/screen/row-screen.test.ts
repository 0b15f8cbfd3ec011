import { afterEach, describe, expect, it } from "vitest";
import {
  AT_LEVEL,
  BRIGHT,
  COUNT,
  COUNT_BRIGHT,
  COUNT_HIGH,
  HIGH,
  LEVEL,
  OUTPUTS,
  PADDING,
  plainRowScreen,
  type RowScreenKernels,
  STEPS_PER_OCTAVE,
} from "../../../src/measure/screen/row-screen.ts";
import { Random } from "../../../src/simulate/random.ts";
import { compiledKernels } from "../../../src/util/kernels/compiled.ts";
import { Arena, kernelMemory } from "../../../src/util/kernels/memory.ts";

const arena = new Arena();
afterEach(() => arena.release());

interface Rows {
  readonly rows: number;
  readonly subbands: number;
  readonly channels: number;
  readonly polarizations: number;
  readonly together: boolean;
  readonly real: Float32Array;
  readonly imag: Float32Array;
  /** samples that are not usable */
  readonly missing?: readonly number[];
}

function screened(kernels: RowScreenKernels, rows: Rows) {
  const { subbands, channels, polarizations, together, real, imag } = rows;
  const samples = subbands * channels * polarizations;
  const products = subbands * polarizations;
  const place = (numbers: number) => arena.allocate(4 * numbers + PADDING)!;
  const [re, im, bits, scratch, sums, counts] = [
    place(real.length),
    place(real.length),
    place(real.length),
    place(samples),
    place(samples),
    place(samples),
  ];
  const out = place(rows.rows * OUTPUTS * products);
  const { f32, i32, u32 } = kernelMemory.heap;
  f32.set(real, re / 4);
  f32.set(imag, im / 4);
  i32.fill(1, bits / 4, bits / 4 + real.length);
  for (const i of rows.missing ?? []) i32[bits / 4 + i] = -1;
  u32.fill(0, sums / 4, sums / 4 + samples);
  u32.fill(0, counts / 4, counts / 4 + samples);
  const whole = kernels.screenRows(
    rows.rows,
    subbands,
    channels,
    polarizations,
    together,
    re,
    im,
    bits,
    scratch,
    sums,
    counts,
    out,
  );
  const outputs = i32.slice(out / 4, out / 4 + rows.rows * OUTPUTS * products);
  return {
    whole,
    sums: u32.slice(sums / 4, sums / 4 + samples),
    counts: u32.slice(counts / 4, counts / 4 + samples),
    outputs,
    of: (row: number, what: number, product: number) => outputs[(row * OUTPUTS + what) * products + product]!,
  };
}

function noise(size: number, seed: number): Float32Array {
  const random = Random.of(seed);
  return Float32Array.from({ length: size }, () => random.normal());
}

describe("screenRows", () => {
  it("is the same compiled and plain, to the last bit, whatever the shape and whatever is missing", () => {
    const compiled = compiledKernels() as RowScreenKernels | undefined;
    if (compiled === undefined) throw new Error("the kernels are not compiled");
    for (const polarizations of [1, 2, 4]) {
      for (const channels of [3, 7, 16, 33]) {
        for (const [subbands, together] of [
          [1, false],
          [3, true],
        ] as const) {
          const size = 5 * subbands * channels * polarizations;
          const [real, imag] = [noise(size, 1), noise(size, 2)];
          real[4] = 1e30;
          imag[size - 1] = Number.NaN;
          real.fill(0, size / 5, (2 * size) / 5);
          imag.fill(0, size / 5, (2 * size) / 5);
          for (const missing of [[], [0, 3, size - 2]]) {
            const rows = { rows: 5, subbands, channels, polarizations, together, real, imag, missing };
            const [a, b] = [screened(compiled, rows), screened(plainRowScreen, rows)];
            expect({ ...a, of: null }).toEqual({ ...b, of: null });
          }
        }
      }
    }
  });

  it("sees nothing of a background that is straight along the channels", () => {
    const real = noise(64, 3);
    const imag = noise(64, 4);
    const sloped = real.map((x, c) => x + 8 + 0.5 * c);
    const shape = { rows: 1, subbands: 1, channels: 64, polarizations: 1, together: false };
    const level = (re: Float32Array) =>
      screened(plainRowScreen, { ...shape, real: re, imag }).of(0, LEVEL, 0);
    expect(Math.abs(level(sloped) - level(real))).toBeLessThanOrEqual(1);
  });

  it("puts a channel that stands out by 40 over noise of 1 at the power of its second difference", () => {
    const real = noise(256, 5);
    const imag = noise(256, 6);
    real[100]! += 40;
    const rows = { rows: 1, subbands: 1, channels: 256, polarizations: 1, together: false, real, imag };
    const result = screened(plainRowScreen, rows);
    // |-2 x 40|^2 over the log mean, e^-gamma of 12, of noise: 9.9 octaves, beyond the highest.
    expect(result.of(0, COUNT_BRIGHT, 0)).toBe(3);
    expect(result.sums[100]).toBe(255);
    // Beside it 40^2: 7.9 octaves.
    expect(result.sums[99]).toBe(255);
    expect(result.whole).toBe(1);
    expect(result.of(0, COUNT, 0)).toBe(254);
  });

  it("finds as many differences above four times the mean as noise has, e^-4", () => {
    const [real, imag] = [noise(1 << 16, 7), noise(1 << 16, 8)];
    const rows = { rows: 256, subbands: 1, channels: 256, polarizations: 1, together: false, real, imag };
    const result = screened(plainRowScreen, rows);
    let above = 0;
    for (let row = 0; row < 256; row++) above += result.of(row, COUNT_HIGH, 0);
    expect(above / (256 * 254)).toBeCloseTo(Math.exp(-4), 2);
    const at = (power: number) =>
      AT_LEVEL + Math.round(STEPS_PER_OCTAVE * Math.log2(power / Math.exp(-0.5772156649)));
    expect([HIGH, BRIGHT]).toEqual([at(4), at(15) - 1]);
    expect(HIGH).toBe(AT_LEVEL + Math.round(STEPS_PER_OCTAVE * Math.log2(4 / Math.exp(-0.5772156649))));
  });
});
