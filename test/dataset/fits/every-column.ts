/** A table of two rows with a column of every type (FITS Standard 4.0, table 18). */
import type { ColumnToWrite } from "../../../src/dataset/fits/write.ts";

export const everyColumn: readonly ColumnToWrite[] = [
  {
    name: "L",
    form: "3L",
    cells: [
      [true, false, null],
      [false, false, true],
    ],
  },
  { name: "X", form: "11X", cells: [[1, 0, 0, 0, 0, 0, 0, 1, 0, 1, 1].map(Boolean), Array(11).fill(true)] },
  { name: "B", form: "1B", cells: [0, 255] },
  {
    name: "I",
    form: "2I",
    cells: [
      [-32768, 32767],
      [1, -1],
    ],
  },
  { name: "J", form: "1J", cells: [-2147483648, 2147483647] },
  { name: "K", form: "1K", cells: [-9007199254740993n, 9223372036854775807n] },
  { name: "A", form: "8A", cells: ["Ridge  ", ""] },
  { name: "E", form: "1E", cells: [1.5, Number.NaN] },
  {
    name: "D",
    form: "3D",
    cells: [
      [1e300, -0.1, Number.NEGATIVE_INFINITY],
      [0, 1, 2],
    ],
  },
  {
    name: "C",
    form: "1C",
    cells: [
      [1.5, -2.5],
      [0, 1],
    ],
  },
  {
    name: "M",
    form: "1M",
    cells: [
      [0.1, 0.2],
      [0.3, 0.4],
    ],
  },
  { name: "P", form: "1PE", cells: [[1, 2, 3], []] },
  { name: "Q", form: "1QJ", cells: [[7], [8, 9]] },
  { name: "ZERO", form: "0D", cells: [[], []] },
  { name: "LAST", form: "1J", cells: [11, 12] },
];
