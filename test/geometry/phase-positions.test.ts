import { describe, expect, it } from "vitest";
import { type PhaseMoment, type PhaseOffset, phaseOffsets } from "../../src/geometry/phase-positions.ts";

const C = 299792458;
const RAD = Math.PI / 180;
const FREQUENCY = 1.4e9;
const DECLINATION = 35 * RAD;

interface Options {
  readonly antennas?: number;
  /** by antenna: metres along x (meridian) and y (east) of the equator */
  readonly offsets?: Readonly<Record<number, readonly [number, number]>>;
  /** first and last hour */
  readonly hours?: readonly [number, number];
  readonly moments?: number;
  /** of the amplitude */
  readonly noise?: number;
  /** radians of a phase jump of antenna 2 half way */
  readonly jump?: number;
  /** radians of phases that wander, by antenna and time */
  readonly wander?: number;
}

/** Evenly spread numbers -1..1 that follow no pattern. */
function scatter(k: number): number {
  const x = Math.sin(k * 12.9898 + 4.1414) * 43758.5453;
  return 2 * (x - Math.floor(x)) - 1;
}

function observed(options: Options): PhaseMoment[] {
  const {
    antennas = 8,
    offsets = {},
    hours = [-3, 3],
    moments = 80,
    noise = 0.05,
    jump = 0,
    wander = 0,
  } = options;
  const first: number[] = [];
  const second: number[] = [];
  for (let i = 0; i < antennas; i++) {
    for (let j = i + 1; j < antennas; j++) {
      first.push(i);
      second.push(j);
    }
  }
  return Array.from({ length: moments }, (_, t) => {
    const hourAngle = (hours[0] + ((hours[1] - hours[0]) * t) / (moments - 1)) * 15 * RAD;
    const phase = Array.from({ length: antennas }, (_, i) => {
      const [dx, dy] = offsets[i] ?? [0, 0];
      const path = Math.cos(DECLINATION) * (dx * Math.cos(hourAngle) - dy * Math.sin(hourAngle));
      const stepped = i === 2 && t >= moments / 2 ? jump : 0;
      return (
        (2 * Math.PI * FREQUENCY * path) / C +
        i +
        stepped +
        wander * Math.sin(0.9 * i + 0.13 * t * (1 + 0.1 * i))
      );
    });
    const value = (p: number, part: (angle: number) => number, seed: number) =>
      part(phase[first[p]!]! - phase[second[p]!]!) + noise * scatter(seed + 1000 * t + 2 * p);
    return {
      graph: { antennas, first: Int32Array.from(first), second: Int32Array.from(second) },
      real: Float64Array.from(first, (_, p) => value(p, Math.cos, 0)),
      imag: Float64Array.from(first, (_, p) => value(p, Math.sin, 1)),
      weight: new Float64Array(first.length).fill(1),
      hourAngle,
    };
  });
}

function solve(options: Options): (PhaseOffset | null)[] | null {
  return phaseOffsets(options.antennas ?? 8, observed(options), FREQUENCY, DECLINATION);
}

describe("phaseOffsets", () => {
  it("measures the offset of one antenna, in the plane of the equator", () => {
    const found = solve({ offsets: { 3: [0.3, -0.4] } })!;
    expect(found[3]!.offset).toBeCloseTo(0.5, 2);
    expect(found[3]!.offset).toBeGreaterThan(20 * found[3]!.error);
    for (const [i, other] of found.entries())
      if (i !== 3) expect(other!.offset).toBeLessThan(5 * other!.error);
  });

  it("measures it when the antenna is the reference", () => {
    const found = solve({ offsets: { 0: [0, 2] } })!;
    expect(found[0]!.offset).toBeCloseTo(2, 2);
    expect(found[4]!.offset).toBeLessThan(0.02);
  });

  it("finds none where there is none, nor in a phase jump or phases that wander", () => {
    for (const options of [{}, { jump: 1 }, { wander: 0.4 }]) {
      for (const offset of solve(options)!) expect(offset!.offset).toBeLessThan(5 * offset!.error);
    }
  });

  it("says nothing without a source that dominates, hours enough or antennas enough", () => {
    expect(solve({ noise: 50 })).toBeNull();
    expect(solve({ hours: [-0.3, 0.3] })).toBeNull();
    expect(solve({ moments: 6 })).toBeNull();
    expect(solve({ antennas: 3 })).toBeNull();
    expect(phaseOffsets(8, [], FREQUENCY, DECLINATION)).toBeNull();
  });
});
