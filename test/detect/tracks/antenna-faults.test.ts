import { describe, expect, it } from "vitest";
import type { Simulated } from "../../../src/simulate/simulate.ts";
import { CLEAN, FAULTY, TRAPS, withFaults } from "../../support/scenarios.ts";
import { integrationsApart, type Judged, judged, subject } from "./judge-events.ts";

type Faulty = keyof typeof FAULTY;

/** Each fault is judged once, whatever is asked of it. */
const known = new Map<Faulty, Promise<Judged & Pick<Simulated, "truth">>>();
function faulty(name: Faulty): Promise<Judged & Pick<Simulated, "truth">> {
  const made = known.get(name);
  if (made !== undefined) return made;
  const { dataset, truth } = FAULTY[name]();
  const promise = judged({ dataset }).then((result) => ({ ...result, truth }));
  known.set(name, promise);
  return promise;
}

const FIELD = {
  sky: [
    { flux: "1.5Jy" },
    { flux: "0.4Jy", east: "4arcmin", north: "-2arcmin" },
    { flux: "0.2Jy", east: "-6arcmin", north: "5arcmin" },
  ],
} as const;
const AIR = {
  sky: [{ flux: "3Jy" }],
  atmosphere: { kind: "turbulence", rms_at_1km: "15deg" },
} as const;

describe("antennaFaults", () => {
  it.each(["circular", "linear", "descending", "fieldsAndGaps"] as const)(
    "finds nothing in good data: %s",
    async (name) => {
      expect((await judged(CLEAN[name]())).events).toEqual([]);
    },
  );

  it.each(Object.entries(TRAPS))("finds nothing where good data looks bad: %s", async (_, make) => {
    expect((await judged(make())).events).toEqual([]);
  });

  it.each([
    ["silentAntenna", "silent-antenna, antenna, antenna 4"],
    ["silentForATime", "silent-antenna, antenna, antenna 4"],
    ["weakAntenna", "weak-antenna, antenna, antenna 4"],
    ["dropout", "dropout, antenna, antenna 4"],
    ["gainStep", "gain-step, antenna, antenna 4"],
    ["noisyAntenna", "noisy, antenna, antenna 4"],
    ["handOff", "hand-off, antenna, antenna 4, LL"],
    ["exchangedHands", "exchanged-hands, antenna, antenna 4"],
    ["phaseJump", "phase-jump, antenna, antenna 4"],
    ["halfTurn", "half-turn, antenna, antenna 4"],
    ["delaySlope", "delay-slope, antenna, antenna 4"],
    ["phaseNoise", "phase-noise, antenna, antenna 4"],
    ["baselinePhase", "closure, correlator, baseline 2-6"],
    ["baselineGain", "closure, correlator, baseline 2-6"],
    ["stuckZeros", "stuck-zeros, antenna, antenna 4"],
    ["weightMismatch", "weight-mismatch, antenna, antenna 4"],
  ] as const)("names the one cause of %s", async (name, expected) => {
    const { events } = await faulty(name);
    expect(events.map(subject)).toEqual([expected]);
  });

  it.each([
    ["phaseJump", "deg"],
    ["gainStep", "ratio"],
    ["delaySlope", "ns"],
    ["baselinePhase", "deg"],
    ["baselineGain", "ratio"],
    ["weakAntenna", "ratio"],
    ["weightMismatch", "ratio"],
  ] as const)("measures %s to three of its errors", async (name, unit) => {
    const { events, truth } = await faulty(name);
    const [event] = events;
    const [fault] = truth.faults;
    expect(event!.unit).toBe(unit);
    expect(Math.abs(event!.size - fault!.size)).toBeLessThan(3 * event!.sizeError);
    // An error as large as the fault would hide any size.
    expect(event!.sizeError).toBeLessThan(0.05 * Math.abs(fault!.size));
  });

  it.each([
    ["phaseJump"],
    ["halfTurn"],
    ["gainStep"],
    ["delaySlope"],
    ["silentForATime"],
    ["stuckZeros"],
  ] as const)("times %s to the integration", async (name) => {
    const { survey, events, truth } = await faulty(name);
    const expected = truth.faults[0]!.selection.time!;
    const found = events[0]!.scope.time!;
    expect(integrationsApart(survey, found[0], expected[0])).toBe(0);
    expect(integrationsApart(survey, found[1], expected[1])).toBe(0);
  });
});

describe("antennaFaults on a harder sky and air", () => {
  it.each([
    [
      "a jump",
      { kind: "phase-jump", antenna: 5, degrees: 25, time: ["17min", "30min"] },
      FIELD,
      "phase-jump",
    ],
    ["a jump", { kind: "phase-jump", antenna: 4, degrees: 30, time: ["12min", "30min"] }, AIR, "phase-jump"],
    [
      "a jump of 10 deg",
      { kind: "phase-jump", antenna: 4, degrees: 10, time: ["12min", "30min"] },
      {},
      "phase-jump",
    ],
    ["a half turn", { kind: "half-turn", antenna: 1, time: ["12min", "30min"] }, AIR, "half-turn"],
    ["the outermost silent", { kind: "silent-antenna", antenna: 9 }, FIELD, "silent-antenna"],
    ["phase noise", { kind: "phase-noise", antenna: 7, degrees: 15 }, AIR, "phase-noise"],
    [
      "a delay",
      { kind: "delay-slope", antenna: 2, nanoseconds: -20, time: ["10min", "30min"] },
      AIR,
      "delay-slope",
    ],
  ] as const)("names the antenna of %s", async (_, fault, changes, kind) => {
    const { events } = await judged(
      withFaults(
        [fault as Parameters<typeof withFaults>[0][number]],
        changes as Parameters<typeof withFaults>[1],
      ),
    );
    expect(events.map(subject)).toEqual([`${kind}, antenna, antenna ${fault.antenna}`]);
  });

  it("tells the hand of a jump", async () => {
    const { events } = await judged(
      withFaults([{ kind: "phase-jump", antenna: 5, degrees: 30, hand: "R", time: ["17min", "30min"] }]),
    );
    expect(events.map(subject)).toEqual(["phase-jump, antenna, antenna 5, RR"]);
  });

  it("tells the sub-band of a jump", async () => {
    const { events } = await judged(
      withFaults([{ kind: "phase-jump", antenna: 3, degrees: 30, subbands: [1], time: ["7min", "30min"] }], {
        frequency: { subbands: 3, channels: 8 },
      }),
    );
    expect(events.map(subject)).toEqual(["phase-jump, antenna, antenna 3, sub-band 1"]);
  });

  it("tells jumps of two antennas at the same time apart", async () => {
    const time = ["14min", "30min"] as [string, string];
    const { events } = await judged(
      withFaults([
        { kind: "phase-jump", antenna: 3, degrees: 30, time },
        { kind: "phase-jump", antenna: 7, degrees: -20, time },
      ]),
    );
    expect(events.map(subject).sort()).toEqual([
      "phase-jump, antenna, antenna 3",
      "phase-jump, antenna, antenna 7",
    ]);
  });

  it("holds a jump and its return as one event, and offers to flag the time between", async () => {
    const { events } = await judged(
      withFaults([{ kind: "phase-jump", antenna: 6, degrees: -25, time: ["8min", "13min"] }]),
    );
    expect(events).toHaveLength(1);
    expect(events[0]!.flag!.time).toEqual(events[0]!.scope.time);
    expect(events[0]!.repair).toContain("calibrate antenna 6 separately");
  });

  it("offers to flag the shorter side of a jump", async () => {
    const { survey, events } = await judged(
      withFaults([{ kind: "phase-jump", antenna: 6, degrees: 40, time: ["8min", "30min"] }]),
    );
    const [from, to] = events[0]!.flag!.time!;
    expect(from).toBe(survey.times[0]);
    expect(to).toBeLessThan(events[0]!.scope.time![0]);
  });

  it("finds a jump in the gap between two scans", async () => {
    const { events } = await judged(
      withFaults([{ kind: "phase-jump", antenna: 3, degrees: 35, time: ["13.5min", "40min"] }], {
        time: { duration: "40min", scan: "5min", gap: "2min" },
        sky: [{ flux: "3Jy" }],
        atmosphere: { kind: "turbulence", rms_at_1km: "4deg" },
      }),
    );
    expect(events.map(subject)).toEqual(["phase-jump, antenna, antenna 3"]);
  });

  it("gives a baseline's error its time", async () => {
    const made = withFaults([
      { kind: "baseline-phase", baseline: [3, 9], degrees: 30, time: ["10min", "20min"] },
    ]);
    const { survey, events } = await judged(made);
    expect(events.map(subject)).toEqual(["closure, correlator, baseline 3-9"]);
    const [start, end] = made.truth.faults[0]!.selection.time!;
    expect(integrationsApart(survey, events[0]!.scope.time![0], start)).toBe(0);
    expect(integrationsApart(survey, events[0]!.scope.time![1], end)).toBe(0);
  });
});
