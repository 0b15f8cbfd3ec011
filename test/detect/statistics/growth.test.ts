import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { growMarks } from "../../../src/detect/statistics/growth.ts";

function grown(marks: readonly number[], eta: number, inside = false): number[] {
  const plane = Uint8Array.from(marks);
  growMarks(plane, 0, 1, plane.length, eta, inside);
  return Array.from(plane);
}

/** By its definition: every interval tried. */
function byDefinition(marks: readonly number[], eta: number): number[] {
  const out = marks.map(() => 0);
  for (let from = 0; from < marks.length; from++) {
    for (let to = from + 1; to <= marks.length; to++) {
      const marked = marks.slice(from, to).filter((mark) => mark === 1).length;
      if (marked >= (1 - eta) * (to - from) - 1e-9) out.fill(1, from, to);
    }
  }
  return out;
}

describe("rank-based growth of marks", () => {
  it("marks what its definition marks, whatever the scale", () => {
    fc.assert(
      fc.property(
        fc.array(fc.constantFrom(0, 0, 1), { minLength: 1, maxLength: 24 }),
        fc.constantFrom(0, 0.1, 0.2, 0.34, 0.5, 1),
        (marks, eta) => {
          const expected = marks.includes(1) ? byDefinition(marks, eta) : marks;
          expect(grown(marks, eta)).toEqual(expected);
        },
      ),
    );
  });

  it("grows by a share of what is there: a long run more than a short one", () => {
    const run = (length: number) => [
      ...new Array(10).fill(0),
      ...new Array(length).fill(1),
      ...new Array(10).fill(0),
    ];
    const growth = (length: number) => grown(run(length), 0.2).filter((mark) => mark === 1).length - length;
    expect(growth(1)).toBe(0);
    expect(growth(4)).toBe(2);
    expect(growth(20)).toBe(10);
  });

  it("fills gaps and no more when told so", () => {
    expect(grown([0, 0, 1, 1, 1, 0, 1, 1, 1, 0, 0], 0.2, true)).toEqual([0, 0, 1, 1, 1, 1, 1, 1, 1, 0, 0]);
  });

  it("walks along columns too, and leaves the others alone", () => {
    const plane = Uint8Array.from([1, 0, 0, 0, 1, 0, 1, 0]);
    growMarks(plane, 0, 2, 4, 0.3);
    expect(Array.from(plane)).toEqual([1, 0, 1, 0, 1, 0, 1, 0]);
  });
});
