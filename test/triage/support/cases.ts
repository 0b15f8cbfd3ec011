/** Invented observations and what their images suffer from, each drawn anew for every seed. */
import { Random } from "../../../src/simulate/random.ts";
import type { ScenarioInput } from "../../../src/simulate/scenario.ts";
import { type Simulated, simulate } from "../../../src/simulate/simulate.ts";
import type { CauseKind } from "../../../src/triage/causes/cause.ts";
import { type Changes, scenarioWith } from "../../support/scenarios.ts";
import { dirtyImage, type Grid, plus, restored, samplesOf, type TrueSource } from "./direct-image.ts";

const ARCSEC = Math.PI / 180 / 3600;

/** What is to be found. */
export interface Truth {
  /** null: the image is clean */
  readonly cause: CauseKind | null;
  readonly baseline?: readonly [number, number];
  readonly antenna?: number;
  readonly channel?: number;
  /** MJD of the first and the last integration */
  readonly time?: readonly [number, number];
}

export interface Game {
  readonly simulated: Simulated;
  readonly truth: Truth;
  readonly grid: Grid;
  /** full width at half maximum of the restoring beam, radians */
  readonly beam: number;
  readonly sources: readonly TrueSource[];
  /** sources that no deconvolution brought back: they stay as the array saw them */
  readonly lost: readonly TrueSource[];
}

export type ImageKind = "restored" | "dirty";

export interface Case {
  readonly name: string;
  readonly make: (seed: number) => Game;
}

class Draw {
  private readonly random: Random;
  constructor(seed: number) {
    this.random = Random.of(seed, 4711);
  }
  whole(low: number, high: number): number {
    return low + Math.floor(this.random.uniform() * (high - low + 1));
  }
  between(low: number, high: number): number {
    return low + this.random.uniform() * (high - low);
  }
  pair(antennas: number): [number, number] {
    const a = this.whole(1, antennas);
    const b = 1 + ((a - 1 + this.whole(1, antennas - 1)) % antennas);
    return a < b ? [a, b] : [b, a];
  }
}

interface Setting {
  readonly grid: Grid;
  readonly beam: number;
  readonly changes: Changes;
}

const ANTENNAS = 10;

function scattered(radius: string, apart: string) {
  return {
    layout: { kind: "random", antennas: ANTENNAS, radius, apart, relief: "2m" },
    sefd: "1600Jy",
  } as const;
}

/** 1.4 GHz, 1 km: a beam of some 20 arcsec. */
const NARROW: Setting = {
  grid: { size: 64, cell: 6.5 * ARCSEC },
  beam: 20 * ARCSEC,
  changes: {
    array: scattered("1km", "60m"),
    time: { start: "2026-03-01T11:00:00", duration: "60min", integration: "60s" },
    frequency: { start: "1.4GHz", channels: 3, width: "1MHz" },
  },
};

/** 150 MHz, 300 m, low in the sky: w turns phases by radians at the edge. */
const WIDE: Setting = {
  grid: { size: 96, cell: 200 * ARCSEC },
  beam: 600 * ARCSEC,
  changes: {
    array: scattered("300m", "25m"),
    time: { start: "2026-03-01T14:30:00", duration: "60min", integration: "60s" },
    frequency: { start: "150MHz", channels: 2, width: "100kHz" },
  },
};

/** No antennas near each other. */
const SPARSE: Setting = {
  ...NARROW,
  changes: {
    ...NARROW.changes,
    array: scattered("1km", "360m"),
    time: { start: "2026-03-01T10:00:00", duration: "60min", integration: "60s" },
  },
};

const BROAD_CHANNELS: Setting = {
  ...NARROW,
  changes: {
    ...NARROW.changes,
    frequency: { start: "1.36GHz", channels: 3, width: "40MHz" },
  },
};

const LONG_INTEGRATIONS: Setting = {
  ...NARROW,
  changes: {
    ...NARROW.changes,
    time: { start: "2026-03-01T09:00:00", duration: "6h", integration: "12min" },
    frequency: { start: "1.4GHz", channels: 4, width: "200kHz" },
  },
};

/** Points apart from each other; `edge`: one of them far out. */
function points(draw: Draw, { grid, beam }: Setting, edge: boolean): TrueSource[] {
  const reach = (grid.size / 2) * grid.cell;
  const count = draw.whole(2, 5);
  const sources: TrueSource[] = [];
  for (let tries = 0; sources.length < count && tries < 1000; tries++) {
    const far = edge && sources.length < 2;
    const radius = far ? draw.between(0.7, 0.85) * reach : Math.sqrt(draw.between(0, 0.5)) * reach;
    const angle = draw.between(0, 2 * Math.PI);
    const [l, m] = [radius * Math.cos(angle), radius * Math.sin(angle)];
    if (sources.some((other) => Math.hypot(other.l - l, other.m - m) < 4 * beam)) continue;
    sources.push({ flux: far ? draw.between(0.8, 1.6) : draw.between(0.3, 1.5), l, m });
  }
  return sources;
}

type Faults = NonNullable<ScenarioInput["faults"]>;

function game(
  name: string,
  seed: number,
  setting: Setting,
  sources: readonly TrueSource[],
  truth: (simulated: Simulated) => Truth,
  options: { faults?: Faults; lost?: readonly TrueSource[]; changes?: Changes } = {},
): Game {
  const { faults = [], lost = [], changes = {} } = options;
  const sky = [...sources, ...lost].map(({ flux, l, m, width = 0 }) => ({
    flux: `${flux}Jy`,
    east: `${Math.asin(l)}rad`,
    north: `${Math.asin(m)}rad`,
    major: `${width}rad`,
  }));
  const simulated = simulate(
    scenarioWith({
      name: name.replaceAll(/\W+/g, "-"),
      seed,
      ...setting.changes,
      ...changes,
      sky,
      faults: [...faults],
    }),
  );
  return { simulated, truth: truth(simulated), grid: setting.grid, beam: setting.beam, sources, lost };
}

/** Minutes from the start, as the first and last integration centre inside. */
function timeOf({ truth }: Simulated, fault = 0): readonly [number, number] {
  const time = truth.faults[fault]?.selection.time;
  if (time === null || time === undefined) throw new Error("the fault has no time");
  return time;
}

function stretch(draw: Draw, least: number, most: number, of: number): [string, string] {
  const length = draw.between(least, most);
  const start = draw.between(1, of - length - 1);
  return [`${start.toFixed(2)}min`, `${(start + length).toFixed(2)}min`];
}

const CLEAN: Truth = { cause: null };

export const CASES: readonly Case[] = [
  {
    name: "bad baseline for some minutes",
    make: (seed) => {
      const draw = new Draw(seed);
      const baseline = draw.pair(ANTENNAS);
      const time = stretch(draw, 5, 15, 60);
      const fault = (
        draw.whole(0, 1) === 0
          ? { kind: "baseline-phase", baseline, time, degrees: draw.between(60, 180) }
          : { kind: "baseline-gain", baseline, time, factor: draw.between(2, 5) }
      ) satisfies Faults[number];
      return game(
        "bad baseline",
        seed,
        NARROW,
        points(draw, NARROW, false),
        (made) => ({ cause: "baseline", baseline, time: timeOf(made) }),
        { faults: [fault] },
      );
    },
  },
  {
    name: "one channel of interference",
    make: (seed) => {
      const draw = new Draw(seed);
      const channel = draw.whole(0, 2);
      return game(
        "interference",
        seed,
        NARROW,
        points(draw, NARROW, false),
        () => ({ cause: "interference", channel }),
        {
          faults: [
            { kind: "persistent-line", channels: String(channel), amplitude: `${draw.between(1, 6)}Jy` },
          ],
        },
      );
    },
  },
  {
    name: "an antenna's gain error",
    make: (seed) => {
      const draw = new Draw(seed);
      const antenna = draw.whole(1, ANTENNAS);
      const factor = draw.whole(0, 1) === 0 ? draw.between(0.5, 0.8) : draw.between(1.2, 1.6);
      const whole = draw.whole(0, 1) === 0;
      const time = stretch(draw, 15, 40, 60);
      return game(
        "gain",
        seed,
        NARROW,
        points(draw, NARROW, false),
        (made) => ({ cause: "antenna-gain", antenna, ...(whole ? {} : { time: timeOf(made) }) }),
        { faults: [{ kind: "gain-step", antenna, factor, ...(whole ? {} : { time }) }] },
      );
    },
  },
  {
    name: "an antenna's phase error",
    make: (seed) => {
      const draw = new Draw(seed);
      const antenna = draw.whole(1, ANTENNAS);
      const degrees = draw.between(20, 90) * (draw.whole(0, 1) === 0 ? 1 : -1);
      const whole = draw.whole(0, 1) === 0;
      const time = stretch(draw, 15, 40, 60);
      return game(
        "phase",
        seed,
        NARROW,
        points(draw, NARROW, false),
        (made) => ({ cause: "antenna-phase", antenna, ...(whole ? {} : { time: timeOf(made) }) }),
        { faults: [{ kind: "phase-jump", antenna, degrees, ...(whole ? {} : { time }) }] },
      );
    },
  },
  {
    name: "uncorrected w at a wide field",
    make: (seed) => {
      const draw = new Draw(seed);
      return game("w term", seed, WIDE, points(draw, WIDE, true), () => ({ cause: "w-term" }));
    },
  },
  {
    name: "missing short spacings",
    make: (seed) => {
      const draw = new Draw(seed);
      const compact = points(draw, SPARSE, false);
      const reach = (SPARSE.grid.size / 2) * SPARSE.grid.cell;
      const lost = {
        flux: draw.between(6, 15),
        l: draw.between(-0.3, 0.3) * reach,
        m: draw.between(-0.3, 0.3) * reach,
        width: draw.between(75, 100) * ARCSEC,
      };
      return game("short spacings", seed, SPARSE, compact, () => ({ cause: "missing-short-spacings" }), {
        lost: [lost],
      });
    },
  },
  {
    name: "bandwidth smearing",
    make: (seed) => {
      const draw = new Draw(seed);
      return game("bandwidth", seed, BROAD_CHANNELS, points(draw, BROAD_CHANNELS, true), () => ({
        cause: "bandwidth-smearing",
      }));
    },
  },
  {
    name: "time smearing",
    make: (seed) => {
      const draw = new Draw(seed);
      return game("time", seed, LONG_INTEGRATIONS, points(draw, LONG_INTEGRATIONS, true), () => ({
        cause: "time-smearing",
      }));
    },
  },
  {
    name: "a source outside the image",
    make: (seed) => {
      const draw = new Draw(seed);
      const reach = (NARROW.grid.size / 2) * NARROW.grid.cell;
      const angle = draw.between(0, 2 * Math.PI);
      const radius = draw.between(1.6, 2.2) * reach;
      const lost = {
        flux: draw.between(0.5, 2),
        l: radius * Math.cos(angle),
        m: radius * Math.sin(angle),
      };
      return game("outside", seed, NARROW, points(draw, NARROW, false), () => ({ cause: "outside-source" }), {
        lost: [lost],
      });
    },
  },
  {
    name: "clean",
    make: (seed) => {
      const draw = new Draw(seed);
      return game("clean", seed, NARROW, points(draw, NARROW, false), () => CLEAN);
    },
  },
  {
    name: "clean, few antennas near each other",
    make: (seed) => {
      const draw = new Draw(seed);
      return game("clean sparse", seed, SPARSE, points(draw, SPARSE, false), () => CLEAN);
    },
  },
];

/** The image of a game, by an imager that corrects w unless that is what goes wrong. Jy a beam. */
export async function imageOf(of: Game, kind: ImageKind): Promise<Float64Array> {
  const { simulated, sources, lost, grid, beam, truth } = of;
  const corrects = truth.cause !== "w-term";
  const samples = await samplesOf(simulated.dataset);
  const errors = plus(samples, -1, sources, corrects);
  if (kind === "dirty") {
    // Corrected: with the sources as they would be without w.
    const all = [...sources, ...lost];
    return dirtyImage(corrects ? plus(plus(samples, -1, all, true), 1, all, false) : samples, grid);
  }
  const image = dirtyImage(errors, grid);
  restored(sources, beam, grid).forEach((value, i) => {
    image[i]! += value;
  });
  return image;
}
