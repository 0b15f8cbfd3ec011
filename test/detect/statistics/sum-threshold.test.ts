import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { sumThreshold } from "../../../src/detect/statistics/sum-threshold.ts";

const SETTINGS = { first: 6, ratio: 1.5, longestTime: 64, longestFrequency: 64 };

function marked(rows: number, columns: number, value: (row: number, column: number) => number): number[] {
  const scores = Float32Array.from({ length: rows * columns }, (_, i) =>
    value(Math.floor(i / columns), i % columns),
  );
  const marks = new Uint8Array(rows * columns);
  sumThreshold(scores, marks, rows, columns, SETTINGS);
  return Array.from(marks.keys()).filter((i) => marks[i] === 1);
}

describe("SumThreshold", () => {
  it("marks nothing where nothing is", () => {
    expect(marked(20, 20, () => 0)).toEqual([]);
    expect(marked(1, 1, () => 5.9)).toEqual([]);
  });

  it("marks one bright sample and not its neighbours", () => {
    expect(marked(9, 9, (row, column) => (row === 4 && column === 4 ? 50 : 0))).toEqual([40]);
  });

  it("marks a channel that is too faint to stand out in any one integration", () => {
    const found = marked(64, 8, (_, column) => (column === 3 ? 1.3 : 0));
    expect(found).toEqual(Array.from({ length: 64 }, (_, row) => row * 8 + 3));
  });

  it("marks an integration that is faint in every channel", () => {
    expect(marked(8, 64, (row) => (row === 2 ? 1.3 : 0))).toEqual(
      Array.from({ length: 64 }, (_, column) => 128 + column),
    );
  });

  it("looks upwards only: power is never less by interference", () => {
    expect(marked(32, 32, () => -8)).toEqual([]);
  });

  it("leaves a sample that is missing unmarked, and sees over it", () => {
    const marks = new Uint8Array(16);
    marks[7] = 2;
    sumThreshold(new Float32Array(16).fill(3), marks, 16, 1, SETTINGS);
    expect(Array.from(marks)).toEqual(Array.from({ length: 16 }, (_, i) => (i === 7 ? 2 : 1)));
  });

  it("does the same along time as along frequency", () => {
    const plane = fc
      .tuple(fc.integer({ min: 1, max: 12 }), fc.integer({ min: 1, max: 12 }))
      .chain(([rows, columns]) =>
        fc.tuple(
          fc.constant(rows),
          fc.constant(columns),
          fc.array(fc.integer({ min: -8, max: 24 }), {
            minLength: rows * columns,
            maxLength: rows * columns,
          }),
        ),
      );
    fc.assert(
      fc.property(plane, ([rows, columns, values]) => {
        const upright = marked(rows, columns, (row, column) => values[row * columns + column]! / 4);
        const turned = marked(columns, rows, (row, column) => values[column * columns + row]! / 4);
        const back = turned.map((i) => (i % rows) * columns + Math.floor(i / rows)).sort((a, b) => a - b);
        expect(back).toEqual(upright);
      }),
    );
  });
});
