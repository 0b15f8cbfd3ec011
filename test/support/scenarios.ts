/**
 * Small invented datasets for the tests: clean ones, one for each fault, and traps, that is, good data which looks
 * bad to a careless detector. Each is quick to make (about 200000 samples) and the same every time.
 *
 * By default: 9 antennas on a spiral of 1 km radius, 30 minutes of 10 s, 16 channels of 500 kHz at 1.4 GHz, RR and LL, a
 * point source of 1 Jy at the phase centre, and noise of 0.126 Jy a sample (S/N 8).
 */
import { type Scenario, type ScenarioInput, scenarioOf } from "../../src/simulate/scenario.ts";
import { type Simulated, simulate } from "../../src/simulate/simulate.ts";

type FaultInput = NonNullable<ScenarioInput["faults"]>[number];

/** What differs from the default: whole values, but array, time and frequency key by key. */
export type Changes = Partial<Omit<ScenarioInput, "array" | "time" | "frequency">> & {
  readonly array?: Partial<ScenarioInput["array"]>;
  readonly time?: Partial<ScenarioInput["time"]>;
  readonly frequency?: Partial<ScenarioInput["frequency"]>;
};

const DEFAULT = {
  name: "clean",
  seed: 20260301,
  array: {
    name: "Larkfield Array",
    latitude: "-31.2deg",
    longitude: "116.4deg",
    height: "420m",
    layout: { kind: "spiral", antennas: 9, inner: "40m", radius: "1km", relief: "2m" },
    diameter: "12m",
    sefd: "400Jy",
  },
  time: { start: "2026-03-01T12:00:00", duration: "30min", integration: "10s" },
  frequency: { start: "1.4GHz", channels: 16, width: "500kHz" },
  polarizations: ["RR", "LL"],
  fields: [{ name: "Heron", ra: "8h30m", dec: "-28d" }],
  sky: [{ flux: "1Jy" }],
} satisfies ScenarioInput;

/** The default scenario with changes. */
export function scenarioWith(changes: Changes = {}): Scenario {
  return scenarioOf({
    ...DEFAULT,
    ...changes,
    array: { ...DEFAULT.array, ...changes.array },
    time: { ...DEFAULT.time, ...changes.time },
    frequency: { ...DEFAULT.frequency, ...changes.frequency },
  });
}

/** The default dataset with changes, and its truth. */
export function simulated(changes: Changes = {}): Simulated {
  return simulate(scenarioWith(changes));
}

/** The default dataset with one or more faults. */
export function withFaults(faults: readonly FaultInput[], changes: Changes = {}): Simulated {
  return simulated({
    name: faults.length === 0 ? "clean" : faults.map(({ kind }) => kind).join(" "),
    ...changes,
    faults: [...faults],
  });
}

function spiral(antennas: number, radius = "1km") {
  return { layout: { kind: "spiral", antennas, inner: "40m", radius, relief: "2m" } } as const;
}

/** Good data of several shapes: nothing is to be found in any of them. */
export const CLEAN = {
  circular: (): Simulated => simulated(),
  linear: (): Simulated =>
    simulated({
      name: "linear",
      polarizations: ["XX", "YY", "XY", "YX"],
      sky: [{ flux: "1Jy", q: 0.05, u: -0.03 }],
      gains: { leakage: 0.02 },
    }),
  eightAntennas: (): Simulated => simulated({ name: "eight", array: spiral(8) }),
  twentySevenAntennas: (): Simulated =>
    simulated({
      name: "twenty-seven",
      array: spiral(27),
      time: { duration: "10min" },
      frequency: { channels: 16, subbands: 2 },
    }),
  descending: (): Simulated => simulated({ name: "descending", frequency: { descending: true } }),
  baselineOrder: (): Simulated => simulated({ name: "baseline order", order: "baseline-time" }),
  fieldsAndGaps: (): Simulated =>
    simulated({
      name: "two fields",
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
} as const;

/** One fault each, at a size that leaves no doubt. */
export const FAULTY = {
  persistentLine: (): Simulated =>
    withFaults([{ kind: "persistent-line", channels: "5", amplitude: "6 sigma" }]),
  burst: (): Simulated =>
    withFaults([{ kind: "burst", channels: "3-9", time: ["12min", "14min"], amplitude: "8 sigma" }]),
  shortBaselineBurst: (): Simulated =>
    withFaults([
      {
        kind: "burst",
        channels: "3-9",
        time: ["12min", "14min"],
        amplitude: "8 sigma",
        shorter_than: "300m",
      },
    ]),
  driftingLine: (): Simulated =>
    withFaults([
      {
        kind: "drifting-line",
        from_channel: 2,
        to_channel: 13,
        time: ["5min", "25min"],
        amplitude: "8 sigma",
      },
    ]),
  loneSamples: (): Simulated => withFaults([{ kind: "lone-samples", share: 0.0005, amplitude: "30 sigma" }]),
  silentAntenna: (): Simulated => withFaults([{ kind: "silent-antenna", antenna: 4 }]),
  silentForATime: (): Simulated =>
    withFaults([{ kind: "silent-antenna", antenna: 4, time: ["10min", "18min"] }]),
  weakAntenna: (): Simulated => withFaults([{ kind: "weak-antenna", antenna: 4, factor: 0.4 }]),
  dropout: (): Simulated => withFaults([{ kind: "dropout", antenna: 4, share: 0.2, stretch: "30s" }]),
  gainStep: (): Simulated =>
    withFaults([{ kind: "gain-step", antenna: 4, factor: 1.5, time: ["15min", "30min"] }]),
  noisyAntenna: (): Simulated => withFaults([{ kind: "noisy", antenna: 4, factor: 3 }]),
  handOff: (): Simulated => withFaults([{ kind: "hand-off", antenna: 4, hand: "L" }]),
  exchangedHands: (): Simulated =>
    withFaults([{ kind: "exchanged-hands", antenna: 4 }], {
      polarizations: ["RR", "LL", "RL", "LR"],
      sky: [{ flux: "1Jy", v: 0.1 }],
    }),
  phaseJump: (): Simulated =>
    withFaults([{ kind: "phase-jump", antenna: 4, degrees: 40, time: ["12min", "30min"] }]),
  halfTurn: (): Simulated => withFaults([{ kind: "half-turn", antenna: 4, time: ["12min", "20min"] }]),
  delaySlope: (): Simulated =>
    withFaults([{ kind: "delay-slope", antenna: 4, nanoseconds: 30, time: ["10min", "20min"] }]),
  phaseNoise: (): Simulated => withFaults([{ kind: "phase-noise", antenna: 4, degrees: 35 }]),
  baselinePhase: (): Simulated => withFaults([{ kind: "baseline-phase", baseline: [2, 6], degrees: 50 }]),
  baselineGain: (): Simulated => withFaults([{ kind: "baseline-gain", baseline: [2, 6], factor: 1.6 }]),
  stuckZeros: (): Simulated => withFaults([{ kind: "stuck-zeros", antennas: [4], time: ["10min", "15min"] }]),
  notFinite: (): Simulated => withFaults([{ kind: "not-finite", channels: "7", share: 0.3 }]),
  infiniteWeights: (): Simulated =>
    withFaults([{ kind: "not-finite", of: "weight", value: "Inf", channels: "7" }]),
  weightMismatch: (): Simulated => withFaults([{ kind: "weight-mismatch", antennas: [4], factor: 10 }]),
  flaggedAntenna: (): Simulated => withFaults([{ kind: "flags", antennas: [4] }]),
  flaggedChannels: (): Simulated => withFaults([{ kind: "flags", channels: "0-3" }]),
  missingAntenna: (): Simulated => withFaults([{ kind: "missing-rows", antennas: [4] }]),
  gap: (): Simulated => withFaults([{ kind: "missing-rows", time: ["10min", "16min"] }]),
  duplicateRows: (): Simulated => withFaults([{ kind: "duplicate-rows", time: ["10min", "11min"] }]),
  reversedRows: (): Simulated => withFaults([{ kind: "reversed-rows", time: ["10min", "11min"] }]),
  flippedAxis: (): Simulated => withFaults([{ kind: "flipped-axis", axis: "v" }]),
  zeroedW: (): Simulated => withFaults([{ kind: "zeroed-axis" }]),
  metresForSeconds: (): Simulated => withFaults([{ kind: "wrong-unit", unit: "metres" }]),
  swappedOrder: (): Simulated => withFaults([{ kind: "swapped-order", baselines: [[2, 6]] }]),
  wrongTablePosition: (): Simulated =>
    withFaults([{ kind: "antenna-position", antenna: 4, offset: ["5m", "-3m", "1m"], of: "table" }]),
  wrongUvwPosition: (): Simulated =>
    withFaults([{ kind: "antenna-position", antenna: 4, offset: ["5m", "-3m", "1m"], of: "uvw" }]),
  wrongModelPosition: (): Simulated =>
    withFaults([{ kind: "antenna-position", antenna: 4, offset: ["20cm", "-10cm", "0m"], of: "model" }]),
  /** a dead antenna, interference and a phase jump on another antenna, at once */
  three: (): Simulated =>
    withFaults(
      [
        { kind: "silent-antenna", antenna: 4 },
        { kind: "burst", channels: "3-9", time: ["12min", "14min"], amplitude: "8 sigma" },
        { kind: "phase-jump", antenna: 7, degrees: 40, time: ["18min", "30min"] },
      ],
      { array: spiral(12) },
    ),
} as const;

/** Good data that looks bad: nothing is to be flagged in any of them. */
export const TRAPS = {
  /** two equal bright sources: visibilities run through deep nulls */
  doubleSource: (): Simulated =>
    simulated({
      name: "double",
      sky: [
        { flux: "20Jy", east: "1.5arcmin", north: "1arcmin" },
        { flux: "20Jy", east: "-1.5arcmin", north: "-1arcmin" },
      ],
    }),
  /** a strong true line over a faint continuum */
  trueLine: (): Simulated =>
    simulated({
      name: "true line",
      frequency: { channels: 32 },
      sky: [{ flux: "0.2Jy", line: { centre: "1.408GHz", width: "1.2MHz", flux: "5Jy" } }],
    }),
  /** a correlator's passband, edges and all */
  rawBandpass: (): Simulated =>
    simulated({
      name: "raw bandpass",
      frequency: { channels: 32, subbands: 2 },
      sky: [{ flux: "5Jy" }],
      gains: { amplitude: 0.15, phase: "60deg", bandpass: { ripple: 0.1, phase: "20deg" } },
      unit: "uncalibrated",
    }),
  /** S/N 0.1 a sample */
  faint: (): Simulated => simulated({ name: "faint", sky: [{ flux: "12.6mJy" }] }),
  noiseAlone: (): Simulated => simulated({ name: "noise alone", sky: [] }),
  walkingPhases: (): Simulated =>
    simulated({
      name: "walking phases",
      sky: [{ flux: "3Jy" }],
      atmosphere: { kind: "walk", rms_per_minute: "8deg" },
    }),
  turbulentAir: (): Simulated =>
    simulated({
      name: "turbulent air",
      sky: [{ flux: "3Jy" }],
      atmosphere: { kind: "turbulence", rms_at_1km: "40deg" },
    }),
  /** a source brightens and fades as it crosses a sidelobe of the dishes */
  transit: (): Simulated =>
    simulated({
      name: "transit",
      sky: [
        { flux: "1Jy" },
        { flux: "15Jy", east: "1.2deg", north: "0.5deg", transit: { at: "15min", width: "6min" } },
      ],
    }),
  /** a bright source far out beats on the short baselines */
  beating: (): Simulated =>
    simulated({ name: "beating", sky: [{ flux: "2Jy" }, { flux: "8Jy", east: "50arcmin" }] }),
  resolvedSource: (): Simulated =>
    simulated({
      name: "resolved",
      sky: [{ flux: "30Jy", major: "3arcmin", minor: "1arcmin", angle: "30deg" }],
    }),
  steepSpectrum: (): Simulated =>
    simulated({
      name: "steep",
      frequency: { width: "8MHz", channels: 32 },
      sky: [{ flux: "4Jy", spectral_index: -2 }],
    }),
} as const;
