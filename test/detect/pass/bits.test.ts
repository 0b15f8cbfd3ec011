import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ones, SampleBits } from "../../../src/detect/pass/bits.ts";

describe("one bit a sample", () => {
  it("counts the ones of a word as its digits do", () => {
    fc.assert(
      fc.property(fc.integer({ min: -(2 ** 31), max: 2 ** 32 - 1 }), (word) => {
        expect(ones(word)).toBe((word >>> 0).toString(2).replaceAll("0", "").length);
      }),
    );
  });

  it("remembers what was set and cleared, cell by cell", () => {
    const places = fc.array(fc.tuple(fc.nat(4), fc.nat(69), fc.boolean()), { maxLength: 60 });
    fc.assert(
      fc.property(places, (changes) => {
        const bits = new SampleBits(5, 70);
        const truth = new Set<string>();
        for (const [cell, sample, on] of changes) {
          if (on) bits.set(cell, sample);
          else bits.clear(cell, sample);
          if (on) truth.add(`${cell} ${sample}`);
          else truth.delete(`${cell} ${sample}`);
        }
        expect(bits.total()).toBe(truth.size);
        for (const [cell, sample] of changes)
          expect(bits.has(cell, sample)).toBe(truth.has(`${cell} ${sample}`));
      }),
    );
  });

  it("counts and sets within a mask", () => {
    const mask = new SampleBits(1, 40);
    for (const sample of [0, 31, 32, 39]) mask.set(0, sample);
    const bits = new SampleBits(2, 40);
    for (let sample = 0; sample < 40; sample += 2) bits.set(1, sample);
    expect(bits.count(1, mask.bits)).toBe(2);
    expect(bits.count(0, mask.bits)).toBe(0);
    bits.setAll(1, mask.bits);
    expect(bits.count(1, mask.bits)).toBe(4);
    expect(bits.total()).toBe(22);
  });
});
