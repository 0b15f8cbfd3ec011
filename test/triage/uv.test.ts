import { describe, expect, it } from "vitest";
import { Random } from "../../src/simulate/random.ts";
import { UvTransformer } from "../../src/triage/uv/transformer.ts";

const [WIDTH, HEIGHT] = [20, 14];

/** Samples at any place, and the image that they make by direct sum. */
function samples(count: number) {
  const random = Random.of(5, 5);
  const column = () => Float64Array.from({ length: count }, () => random.uniform() - 0.5);
  const at = { x: column().map((x) => 0.9 * x), y: column().map((y) => 0.9 * y) };
  const [re, im] = [column(), column()];
  const direct = (part: "re" | "im") =>
    Float64Array.from({ length: WIDTH * HEIGHT }, (_, i) => {
      const [x, y] = [(i % WIDTH) - (WIDTH >> 1), Math.floor(i / WIDTH) - (HEIGHT >> 1)];
      let sum = 0;
      for (let k = 0; k < count; k++) {
        const phase = 2 * Math.PI * (at.x[k]! * x + at.y[k]! * y);
        sum +=
          part === "re"
            ? re[k]! * Math.cos(phase) - im[k]! * Math.sin(phase)
            : re[k]! * Math.sin(phase) + im[k]! * Math.cos(phase);
      }
      return sum;
    });
  return { at, re, im, direct };
}

describe("UvTransformer", () => {
  const transformer = new UvTransformer(WIDTH, HEIGHT);

  // The kernel errs by some 1e-5 of the sum of amplitudes (Beatty, Nishimura & Pauly 2005, figure 3, width 6).
  it("makes the image of samples that a direct sum makes", () => {
    const { at, re, im, direct } = samples(50);
    const [real, imag] = [new Float64Array(WIDTH * HEIGHT), new Float64Array(WIDTH * HEIGHT)];
    transformer.toImage(at, re, im, null, real, imag);
    direct("re").forEach((value, i) => {
      expect(Math.abs(real[i]! - value)).toBeLessThan(1e-3);
    });
    direct("im").forEach((value, i) => {
      expect(Math.abs(imag[i]! - value)).toBeLessThan(1e-3);
    });
  });

  it("reads the transform of an image at any frequency", () => {
    const pixels = Float64Array.from({ length: WIDTH * HEIGHT }, (_, i) => Math.sin(i * i));
    const spectrum = transformer.spectrum(pixels);
    for (const [fx, fy] of [
      [0, 0],
      [0.123, -0.31],
      [-0.45, 0.02],
    ] as const) {
      let [re, im] = [0, 0];
      pixels.forEach((value, i) => {
        const phase =
          -2 * Math.PI * (fx * ((i % WIDTH) - (WIDTH >> 1)) + fy * (Math.floor(i / WIDTH) - (HEIGHT >> 1)));
        re += value * Math.cos(phase);
        im += value * Math.sin(phase);
      });
      spectrum.read(fx, fy);
      expect(Math.abs(spectrum.re - re) + Math.abs(spectrum.im - im)).toBeLessThan(2e-3);
    }
  });

  it("passes over samples that the pixels do not sample", () => {
    const real = new Float64Array(WIDTH * HEIGHT);
    const at = { x: Float64Array.of(0.6), y: Float64Array.of(0) };
    transformer.toImage(at, [1], [0], null, real);
    expect(Math.max(...real.map(Math.abs))).toBe(0);
  });
});
