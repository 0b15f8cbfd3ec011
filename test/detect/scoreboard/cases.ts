/**
 * What the scoreboard is played on: invented observations with faults, and good ones that look bad. Each case makes as
 * many datasets as there are seeds; the seed moves noise, sky, place and size of the fault.
 */
import type { PlanRequest } from "../../../src/dataset/plan-request.ts";
import type { EventKind } from "../../../src/detect/event.ts";
import { Random } from "../../../src/simulate/random.ts";
import type { ScenarioInput } from "../../../src/simulate/scenario.ts";
import type { Simulated } from "../../../src/simulate/simulate.ts";
import { type Changes, simulated } from "../../support/scenarios.ts";

type FaultInput = NonNullable<ScenarioInput["faults"]>[number];

export type Family = "clean" | "interference" | "antenna" | "phase" | "baseline" | "values" | "several";

export interface Case {
  readonly name: string;
  readonly family: Family;
  readonly make: (seed: number) => Simulated;
  readonly plan?: Pick<PlanRequest, "purpose" | "lineChannels">;
  /** by fault of the scenario: kinds of event that name it rightly; an empty list: nothing need be said of it */
  readonly accept: readonly (readonly EventKind[])[];
}

/** Choices that a seed makes. */
class Draw {
  private readonly random: Random;
  constructor(seed: number) {
    this.random = Random.of(seed, 77);
  }
  whole(low: number, high: number): number {
    return low + Math.floor(this.random.uniform() * (high - low + 1));
  }
  between(low: number, high: number): number {
    return low + this.random.uniform() * (high - low);
  }
}

function spiral(antennas: number, radius = "1km") {
  return { layout: { kind: "spiral", antennas, inner: "40m", radius, relief: "2m" } } as const;
}

interface Drawn {
  readonly faults?: readonly FaultInput[];
  readonly changes?: Changes;
}

function play(
  name: string,
  family: Family,
  accept: Case["accept"],
  draw: (draw: Draw) => Drawn,
  plan?: Case["plan"],
): Case {
  return {
    name,
    family,
    accept,
    ...(plan === undefined ? {} : { plan }),
    make: (seed) => {
      const { faults = [], changes = {} } = draw(new Draw(seed));
      return simulated({ name, seed, ...changes, faults: [...faults] });
    },
  };
}

const clean = (name: string, changes: Changes | ((draw: Draw) => Changes), plan?: Case["plan"]): Case =>
  play(
    name,
    "clean",
    [],
    (draw) => ({ changes: typeof changes === "function" ? changes(draw) : changes }),
    plan,
  );

const CLEAN: readonly Case[] = [
  clean("point source, 8 antennas", { array: spiral(8) }),
  clean("point source, 9 antennas", {}),
  clean("point source, 27 antennas, 2 sub-bands", {
    array: spiral(27),
    time: { duration: "8min" },
    frequency: { subbands: 2 },
  }),
  clean("linear feeds, 4 products", {
    polarizations: ["XX", "YY", "XY", "YX"],
    sky: [{ flux: "1Jy", q: 0.05, u: -0.03 }],
    gains: { leakage: 0.02 },
  }),
  clean("8 sub-bands of 8 channels", {
    frequency: { subbands: 8, channels: 8 },
    time: { duration: "12min" },
  }),
  clean("one channel", { frequency: { channels: 1, width: "8MHz" } }),
  clean("two fields with gaps", {
    time: { duration: "40min", scan: "5min", gap: "2min" },
    fields: [
      { name: "Heron", ra: "8h30m", dec: "-28d" },
      { name: "Wren", ra: "8h50m", dec: "-25d" },
    ],
    sky: [
      { flux: "1Jy", fields: [1] },
      { flux: "3Jy", fields: [2] },
      { flux: "0.4Jy", east: "4arcmin", north: "-2arcmin", fields: [1] },
    ],
  }),
  clean("faint, S/N 0.1 a sample", { sky: [{ flux: "12.6mJy" }] }),
  clean("noise alone", { sky: [] }),
  clean("bright double with deep nulls", (draw) => ({
    sky: [
      { flux: "20Jy", east: `${draw.between(0.5, 2.5)}arcmin`, north: "1arcmin" },
      { flux: `${draw.between(18, 20)}Jy`, east: "-1.5arcmin", north: `${-draw.between(0.5, 2)}arcmin` },
    ],
  })),
  clean(
    "true line, purpose line",
    {
      frequency: { channels: 32 },
      sky: [{ flux: "0.2Jy", line: { centre: "1.408GHz", width: "1.2MHz", flux: "5Jy" } }],
    },
    { purpose: "line", lineChannels: [{ subband: 0, channels: [10, 22] }] },
  ),
  clean(
    "true line off centre, protected",
    {
      frequency: { channels: 32 },
      sky: [
        { flux: "0.5Jy" },
        {
          flux: "0Jy",
          east: "3arcmin",
          north: "2arcmin",
          line: { centre: "1.408GHz", width: "1.2MHz", flux: "5Jy" },
        },
      ],
    },
    { purpose: "line", lineChannels: [{ subband: 0, channels: [9, 23] }] },
  ),
  clean("raw passband", {
    frequency: { channels: 32, subbands: 2 },
    sky: [{ flux: "5Jy" }],
    gains: { amplitude: 0.15, phase: "60deg", bandpass: { ripple: 0.1, phase: "20deg" } },
    unit: "uncalibrated",
  }),
  clean("raw passband, faint source", {
    frequency: { channels: 32 },
    sky: [{ flux: "0.15Jy" }],
    gains: { amplitude: 0.15, phase: "60deg", bandpass: { ripple: 0.1, phase: "20deg" } },
    unit: "uncalibrated",
  }),
  clean("walking phases", {
    sky: [{ flux: "3Jy" }],
    atmosphere: { kind: "walk", rms_per_minute: "8deg" },
  }),
  clean("turbulent air", {
    sky: [{ flux: "3Jy" }],
    atmosphere: { kind: "turbulence", rms_at_1km: "40deg" },
  }),
  clean("transit of a bright source", (draw) => ({
    sky: [
      { flux: "1Jy" },
      {
        flux: "15Jy",
        east: "1.2deg",
        north: "0.5deg",
        transit: { at: `${draw.between(8, 22)}min`, width: "6min" },
      },
    ],
  })),
  clean("bright source far out, beating", (draw) => ({
    sky: [{ flux: "2Jy" }, { flux: "8Jy", east: `${draw.between(35, 60)}arcmin` }],
  })),
  clean("resolved source", (draw) => ({
    sky: [{ flux: "30Jy", major: "3arcmin", minor: "1arcmin", angle: `${draw.between(0, 180)}deg` }],
  })),
  clean("steep spectrum, wide band", {
    frequency: { width: "8MHz", channels: 32 },
    sky: [{ flux: "4Jy", spectral_index: -2 }],
  }),
];

const INTERFERENCE: readonly Case[] = [
  play("line, 6 sigma", "interference", [["persistent-line"]], (draw) => ({
    faults: [{ kind: "persistent-line", channels: `${draw.whole(0, 15)}`, amplitude: "6 sigma" }],
  })),
  play("line, 2 sigma on all baselines", "interference", [["persistent-line"]], (draw) => ({
    faults: [{ kind: "persistent-line", channels: `${draw.whole(0, 15)}`, amplitude: "2 sigma" }],
  })),
  play("line of 5 channels, 5 sigma, 64 channels", "interference", [["persistent-line"]], (draw) => {
    const low = draw.whole(0, 59);
    return {
      faults: [{ kind: "persistent-line", channels: `${low}-${low + 4}`, amplitude: "5 sigma" }],
      changes: { frequency: { channels: 64 }, time: { duration: "15min" } },
    };
  }),
  play("line in one hand, 5 sigma", "interference", [["persistent-line"]], (draw) => ({
    faults: [
      {
        kind: "persistent-line",
        channels: `${draw.whole(0, 15)}`,
        amplitude: "5 sigma",
        polarizations: ["RR"],
      },
    ],
  })),
  play("line in a faint field, raw passband", "interference", [["persistent-line"]], (draw) => ({
    faults: [{ kind: "persistent-line", channels: `${draw.whole(4, 27)}`, amplitude: "5 sigma" }],
    changes: {
      frequency: { channels: 32 },
      sky: [{ flux: "0.3Jy" }],
      gains: { amplitude: 0.15, phase: "60deg", bandpass: { ripple: 0.1, phase: "20deg" } },
      unit: "uncalibrated",
    },
  })),
  play("burst, 8 sigma", "interference", [["burst"]], (draw) => burst(draw, "8 sigma")),
  play("burst, 5 sigma", "interference", [["burst"]], (draw) => burst(draw, "5 sigma")),
  play("burst, 2 sigma on all baselines", "interference", [["burst"]], (draw) => burst(draw, "2 sigma")),
  play("burst over the whole band, 6 sigma", "interference", [["burst"]], (draw) => {
    const start = draw.whole(4, 24);
    return { faults: [{ kind: "burst", time: [`${start}min`, `${start + 1}min`], amplitude: "6 sigma" }] };
  }),
  play("burst on short baselines, 8 sigma", "interference", [["burst"]], (draw) =>
    burst(draw, "8 sigma", { shorter_than: "300m" }),
  ),
  play("burst of one integration, 8 sigma", "interference", [["burst"]], (draw) => {
    const start = draw.whole(4, 26);
    const low = draw.whole(0, 9);
    return {
      faults: [
        {
          kind: "burst",
          channels: `${low}-${low + 6}`,
          time: [`${start}min`, `${start * 60 + 9}s`],
          amplitude: "8 sigma",
        },
      ],
    };
  }),
  play("drifting line, 8 sigma", "interference", [["drifting-line"]], (draw) => {
    const start = draw.whole(2, 8);
    const up = draw.whole(0, 1) === 1;
    return {
      faults: [
        {
          kind: "drifting-line",
          from_channel: up ? 2 : 13,
          to_channel: up ? 13 : 2,
          time: [`${start}min`, `${start + 20}min`],
          amplitude: "8 sigma",
        },
      ],
    };
  }),
  play("lone samples, 30 sigma", "interference", [["lone-samples"]], () => ({
    faults: [{ kind: "lone-samples", share: 0.0005, amplitude: "30 sigma" }],
  })),
  play("burst at a bright double source", "interference", [["burst"]], (draw) => {
    const { faults } = burst(draw, "8 sigma");
    return {
      faults: faults!,
      changes: {
        sky: [
          { flux: "3Jy", east: "1.5arcmin", north: "1arcmin" },
          { flux: "3Jy", east: "-1.5arcmin", north: "-1arcmin" },
        ],
      },
    };
  }),
  play("64 antennas, line and burst, 5 sigma", "interference", [["persistent-line"], ["burst"]], (draw) => ({
    faults: [
      { kind: "persistent-line", channels: `${draw.whole(0, 7)}`, amplitude: "5 sigma" },
      { kind: "burst", channels: "10-13", time: ["60s", "100s"], amplitude: "5 sigma" },
    ],
    changes: { array: spiral(64, "2km"), time: { duration: "3min" } },
  })),
];

function burst(draw: Draw, amplitude: `${number} sigma`, more: Partial<FaultInput> = {}): Drawn {
  const start = draw.whole(3, 24);
  const low = draw.whole(0, 9);
  const fault = {
    kind: "burst",
    channels: `${low}-${low + 6}`,
    time: [`${start}min`, `${start + 2}min`],
    amplitude,
    ...more,
  };
  return { faults: [fault as FaultInput] };
}

const ANTENNAS: readonly Case[] = [
  play("silent antenna", "antenna", [["silent-antenna"]], (draw) => ({
    faults: [{ kind: "silent-antenna", antenna: draw.whole(1, 9) }],
  })),
  play("8 antennas, one of them silent", "antenna", [["silent-antenna"]], (draw) => ({
    faults: [{ kind: "silent-antenna", antenna: draw.whole(1, 8) }],
    changes: { array: spiral(8) },
  })),
  play("silent for 8 minutes", "antenna", [["silent-antenna", "dropout"]], (draw) => {
    const start = draw.whole(3, 18);
    return {
      faults: [
        { kind: "silent-antenna", antenna: draw.whole(1, 9), time: [`${start}min`, `${start + 8}min`] },
      ],
    };
  }),
  play("weak antenna", "antenna", [["weak-antenna"]], (draw) => ({
    faults: [{ kind: "weak-antenna", antenna: draw.whole(1, 9), factor: draw.between(0.3, 0.5) }],
  })),
  play("dropouts", "antenna", [["dropout"]], (draw) => ({
    faults: [{ kind: "dropout", antenna: draw.whole(1, 9), share: 0.2, stretch: "30s" }],
  })),
  play("gain step", "antenna", [["gain-step"]], (draw) => ({
    faults: [
      {
        kind: "gain-step",
        antenna: draw.whole(1, 9),
        factor: draw.whole(0, 1) === 1 ? 1.5 : 0.7,
        time: [`${draw.whole(6, 22)}min`, "30min"],
      },
    ],
  })),
  play("noisy antenna", "antenna", [["noisy"]], (draw) => ({
    faults: [{ kind: "noisy", antenna: draw.whole(1, 9), factor: 3 }],
  })),
  play("one hand off", "antenna", [["hand-off"]], (draw) => ({
    faults: [{ kind: "hand-off", antenna: draw.whole(1, 9), hand: draw.whole(0, 1) === 1 ? "L" : "R" }],
  })),
  play("exchanged hands", "antenna", [["exchanged-hands"]], (draw) => ({
    faults: [{ kind: "exchanged-hands", antenna: draw.whole(1, 9) }],
    changes: { polarizations: ["RR", "LL", "RL", "LR"], sky: [{ flux: "1Jy", v: 0.1 }] },
  })),
  play("weights ten times too large", "values", [["weight-mismatch"]], (draw) => ({
    faults: [{ kind: "weight-mismatch", antennas: [draw.whole(1, 9)], factor: 10 }],
  })),
  play("stuck zeros", "values", [["stuck-zeros"]], (draw) => {
    const start = draw.whole(2, 22);
    return {
      faults: [
        { kind: "stuck-zeros", antennas: [draw.whole(1, 9)], time: [`${start}min`, `${start + 5}min`] },
      ],
    };
  }),
];

function jump(draw: Draw, degrees: number, changes: Changes = {}): Drawn {
  const start = draw.whole(6, 22);
  return {
    faults: [
      {
        kind: "phase-jump",
        antenna: draw.whole(1, 9),
        degrees: draw.whole(0, 1) === 1 ? degrees : -degrees,
        time: [`${start}min`, "30min"],
      },
    ],
    changes,
  };
}

const PHASES: readonly Case[] = [
  play("jump of 40 degrees", "phase", [["phase-jump"]], (draw) => jump(draw, 40)),
  play("jump of 10 degrees", "phase", [["phase-jump"]], (draw) => jump(draw, 10)),
  play("jump of 40 degrees in walking phases", "phase", [["phase-jump"]], (draw) =>
    jump(draw, 40, { sky: [{ flux: "3Jy" }], atmosphere: { kind: "walk", rms_per_minute: "8deg" } }),
  ),
  play("jump of 40 degrees in turbulent air", "phase", [["phase-jump"]], (draw) =>
    jump(draw, 40, { sky: [{ flux: "3Jy" }], atmosphere: { kind: "turbulence", rms_at_1km: "20deg" } }),
  ),
  play("jump of 30 degrees, S/N 1 a sample", "phase", [["phase-jump"]], (draw) =>
    jump(draw, 30, { sky: [{ flux: "0.126Jy" }] }),
  ),
  play("jump of 50 degrees for 5 minutes in one hand", "phase", [["phase-jump"]], (draw) => {
    const start = draw.whole(3, 20);
    return {
      faults: [
        {
          kind: "phase-jump",
          antenna: draw.whole(1, 9),
          hand: "R",
          degrees: 50,
          time: [`${start}min`, `${start + 5}min`],
        },
      ],
    };
  }),
  play("half turn for 8 minutes", "phase", [["half-turn"]], (draw) => {
    const start = draw.whole(3, 18);
    return {
      faults: [{ kind: "half-turn", antenna: draw.whole(1, 9), time: [`${start}min`, `${start + 8}min`] }],
    };
  }),
  play("delay of 30 ns for 10 minutes", "phase", [["delay-slope"]], (draw) => {
    const start = draw.whole(3, 17);
    return {
      faults: [
        {
          kind: "delay-slope",
          antenna: draw.whole(1, 9),
          nanoseconds: 30,
          time: [`${start}min`, `${start + 10}min`],
        },
      ],
    };
  }),
  play("phase noise of 35 degrees", "phase", [["phase-noise"]], (draw) => ({
    faults: [{ kind: "phase-noise", antenna: draw.whole(1, 9), degrees: 35 }],
  })),
  play("correlator phase of 50 degrees", "baseline", [["closure"]], (draw) => ({
    faults: [{ kind: "baseline-phase", baseline: pair(draw), degrees: 50 }],
  })),
  play("correlator gain of 1.6", "baseline", [["closure"]], (draw) => ({
    faults: [{ kind: "baseline-gain", baseline: pair(draw), factor: 1.6 }],
  })),
];

function pair(draw: Draw): [number, number] {
  const one = draw.whole(1, 8);
  return [one, draw.whole(one + 1, 9)];
}

const SEVERAL: readonly Case[] = [
  play(
    "silent antenna, bursts and a jump",
    "several",
    [["silent-antenna"], ["burst"], ["phase-jump"]],
    (draw) => {
      const silent = draw.whole(1, 12);
      const jumping = (silent + draw.whole(1, 11) - 1) % 12;
      return {
        faults: [
          { kind: "silent-antenna", antenna: silent },
          { kind: "burst", channels: "3-9", time: ["12min", "14min"], amplitude: "8 sigma" },
          { kind: "phase-jump", antenna: jumping + 1, degrees: 40, time: ["18min", "30min"] },
        ],
        changes: { array: spiral(12) },
      };
    },
  ),
];

export const CASES: readonly Case[] = [...CLEAN, ...INTERFERENCE, ...ANTENNAS, ...PHASES, ...SEVERAL];

/** Settings are tuned on these and on the scenarios of the tests; what is reported is played on others. */
export const TUNING_SEEDS: readonly number[] = [1, 2];
export const REPORT_SEEDS: readonly number[] = [701, 702, 703, 704, 705];
