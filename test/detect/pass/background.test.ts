import { describe, expect, it } from "vitest";
import { Background } from "../../../src/detect/pass/background.ts";
import { Plane } from "../../../src/detect/pass/plane.ts";
import { Random } from "../../../src/simulate/random.ts";

interface Sample {
  readonly re: number;
  readonly im: number;
}

const wave = (size: number, turns: number): Sample => ({
  re: size * Math.cos(2 * Math.PI * turns),
  im: size * Math.sin(2 * Math.PI * turns),
});
const plus = (a: Sample, b: Sample): Sample => ({ re: a.re + b.re, im: a.im + b.im });

/** A plane of unit noise (in the real and in the imaginary part) over a signal. */
function planeOf(rows: number, columns: number, signal: (row: number, column: number) => Sample): Plane {
  const random = Random.of(11, rows, columns);
  const plane = new Plane();
  plane.resize(rows, columns);
  plane.marks.fill(0);
  plane.held.fill(0);
  plane.usable.fill(columns);
  for (let i = 0; i < rows * columns; i++) {
    const { re, im } = signal(Math.floor(i / columns), i % columns);
    plane.real[i] = re + random.normal();
    plane.imag[i] = im + random.normal();
  }
  return plane;
}

const NOISE = 2;
/** Radians a channel that sources in sight can cause. */
const STEEPEST = 0.4;

/** Mean of what is left over noise, over samples where `where` holds. */
function left(plane: Plane, where: (row: number, column: number) => boolean = () => true): number {
  new Background().fit(plane, NOISE, () => STEEPEST, 0.1);
  const { rows, columns, power } = plane;
  let sum = 0;
  let count = 0;
  for (let i = 0; i < rows * columns; i++) {
    if (!where(Math.floor(i / columns), i % columns)) continue;
    sum += power[i]! / NOISE;
    count += 1;
  }
  return sum / count;
}

describe("the background of a plane", () => {
  const rows = 64;
  const columns = 24;

  // Standard error of a mean over 1536 exponential powers: 0.026. Terms that noise happens to fit take some.
  const likeNoise = (value: number) => {
    expect(value).toBeGreaterThan(0.9);
    expect(value).toBeLessThan(1.12);
  };

  it("leaves noise as it is", () => {
    likeNoise(left(planeOf(rows, columns, () => ({ re: 0, im: 0 }))));
  });

  it("takes out a source whose amplitude does what it likes in time", () => {
    const jumping = (row: number) => wave(row % 7 === 0 ? 0 : 40, row > 30 ? row / 9 : -row / 5);
    likeNoise(left(planeOf(rows, columns, jumping)));
  });

  it("takes out a passband with steep edges and a winding phase", () => {
    const shape = (column: number) =>
      wave(Math.min(1, 0.1 + Math.min(column, columns - 1 - column) / 3), column / 6);
    likeNoise(
      left(
        planeOf(rows, columns, (row, column) => {
          const { re, im } = shape(column);
          const turn = wave(30, row / 17);
          return { re: re * turn.re - im * turn.im, im: re * turn.im + im * turn.re };
        }),
      ),
    );
  });

  it("takes out a bright source far from the centre that beats with another", () => {
    const turns = 0.3 / (2 * Math.PI);
    likeNoise(
      left(planeOf(rows, columns, (row, column) => plus(wave(10, 0), wave(40, row * 0.13 + column * turns)))),
    );
  });

  it("takes out a delay that an antenna gets for a while, however steep", () => {
    likeNoise(
      left(planeOf(rows, columns, (row, column) => wave(10, row >= 24 && row < 48 ? column * 0.2 : 0))),
    );
  });

  it("takes out a line that keeps its phase, as the sky's do", () => {
    likeNoise(left(planeOf(rows, columns, (_, column) => wave(column === 9 ? 40 : 2, 0.1))));
  });

  it("leaves a line whose phase runs, as interference's does", () => {
    const plane = planeOf(rows, columns, (row, column) =>
      plus(wave(8, 0), column === 9 ? wave(6, row * 0.37) : wave(0, 0)),
    );
    const power = left(plane, (_, column) => column === 9);
    // (6^2 + 2) / 2
    expect(power).toBeGreaterThan(17);
    expect(power).toBeLessThan(22);
    likeNoise(left(plane, (_, column) => column !== 9));
  });

  it("leaves a burst over many channels, and does not bend around it", () => {
    const inBurst = (row: number, column: number) => row >= 20 && row < 32 && column >= 12 && column < 22;
    const plane = planeOf(rows, columns, (row, column) =>
      plus(wave(8, 0), inBurst(row, column) ? wave(8, row * 0.31 + column * 0.43) : wave(0, 0)),
    );
    // (8^2 + 2) / 2
    expect(left(plane, inBurst)).toBeGreaterThan(27);
    likeNoise(left(plane, (row, column) => !inBurst(row, column)));
  });
});
