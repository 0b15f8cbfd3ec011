/**
 * Caps on the dynamic range against images with errors summed directly in NumPy (dynamic-range.py), and against the
 * published relations (dynamic-range-check-values.json, with their provenance).
 */
import { describe, expect, it } from "vitest";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import type { DetectedEvent, EventKind } from "../../src/detect/event.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { snapshotDynamicRange } from "../../src/imaging/limits.ts";
import { type ArrayOptions, observedArray } from "../imaging/observed-array.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface ArrayFacts {
  antennas_enu_m: [number, number, number][];
  latitude_deg: number;
  declination_deg: number;
  frequency_hz: number;
  channel_width_hz: number;
  field_rad: number;
  first_hour: number;
  last_hour: number;
  integrations: number;
}

const reference = stored<{
  snapshot: {
    antennas: number;
    error_rad: number;
    dynamic_range: Record<"baseline" | "antenna" | "baselines" | "antennas", number>;
  };
  array: ArrayFacts;
  rotating: {
    name: string;
    first_integration: number;
    last_integration: number;
    weighting: "natural" | "uniform";
    channels: number;
    antenna: number | null;
    event: EventKind;
    size: number;
    unit: string;
    samples: number;
    dynamic_range: number;
  }[];
  edge: {
    field_rad: number;
    cause: string;
    channel_width_hz?: number;
    integration_s?: number;
    dynamic_range: number;
  }[];
}>("dynamic-range");
const [sheet] = stored<{
  entries: { inputs: { N: number; error_rad: number }; expected: Record<string, number> }[];
}>("dynamic-range-check-values").entries;

/** The images are sampled at a finite number of places, and errors of their own are drawn: good to half of this. */
const IMAGE_TOLERANCE = 0.02;

function event(part: Partial<DetectedEvent>): DetectedEvent {
  return {
    kind: "phase-jump",
    cause: "antenna",
    scope: EVERYTHING,
    flag: null,
    size: 0,
    sizeError: 1,
    unit: "deg",
    significance: 20,
    confidence: 1,
    samples: 1,
    outlying: 1,
    evidence: "",
    repair: null,
    ...part,
  };
}

function observe(options: Partial<ArrayOptions>) {
  const { array } = reference;
  return observedArray({
    antennas: array.antennas_enu_m,
    latitude: array.latitude_deg,
    declination: array.declination_deg,
    frequency: array.frequency_hz,
    channelWidth: array.channel_width_hz,
    hours: [array.first_hour, array.last_hour],
    integrations: array.integrations,
    channels: 1,
    polarizations: ["I"],
    ...options,
  });
}

describe("the relations for one snapshot", () => {
  const names = ["baseline", "antenna", "baselines", "antennas"] as const;

  it.each(names)("agree with the stored one for errors on %s", (of) => {
    const key = {
      baseline: "one_baseline",
      antenna: "one_antenna",
      baselines: "all_baselines",
      antennas: "all_antennas",
    };
    const range = snapshotDynamicRange(of, sheet!.inputs.N, sheet!.inputs.error_rad);
    expect(range / sheet!.expected[key[of]]!).toBeCloseTo(1, 6);
  });

  it.each(names)("agree with images of errors on %s", (of) => {
    const { antennas, error_rad, dynamic_range } = reference.snapshot;
    const range = snapshotDynamicRange(of, antennas, error_rad);
    expect(Math.abs(range / dynamic_range[of] - 1)).toBeLessThan(IMAGE_TOLERANCE);
  });
});

describe("the cap that an event puts on an image", () => {
  const { array } = reference;

  it.each([
    ["baseline", { baselines: [[3, 9]] as [number, number][] }],
    ["antenna", { antennas: [5] }],
  ] as const)("is the published one of a snapshot for an error on one %s", async (of, part) => {
    const { survey } = observe({ integrations: 1 });
    // So wide a field that no two baselines lie within a cell of it.
    const plan = derivePlan({ weighting: { kind: "natural" }, fieldOfView: 8 * array.field_rad }, survey);
    const { image } = await forecast(survey, plan, {
      events: [event({ scope: { ...EVERYTHING, ...part }, size: 4 })],
    });
    const limit = image.limits.find(({ cause }) => cause === "phase-jump")!;
    const expected = snapshotDynamicRange(of, array.antennas_enu_m.length, (4 * Math.PI) / 180);
    expect(limit.dynamicRangeFraction / expected).toBeCloseTo(1, 2);
  });

  it.each(reference.rotating)("is that of the image: $name", async (given) => {
    const { survey } = observe({ channels: given.channels });
    const weighting = { kind: given.weighting };
    const plan = derivePlan({ weighting, fieldOfView: array.field_rad }, survey);
    const time = [survey.times[given.first_integration]!, survey.times[given.last_integration]!] as const;
    const part = given.antenna === null ? { baselines: [[3, 9]] as const } : { antennas: [given.antenna] };
    const { event: kind, size, unit, samples } = given;
    const { image } = await forecast(survey, plan, {
      events: [event({ kind, size, unit, samples, scope: { ...EVERYTHING, ...part, time } })],
    });
    const limit = image.limits.find(({ cause }) => cause === kind)!;
    expect(Math.abs(limit.dynamicRangeFraction / given.dynamic_range - 1)).toBeLessThan(IMAGE_TOLERANCE);
  });
});

describe("the cap around a source at the edge of the field", () => {
  it.each(reference.edge)("is that of the image: $cause, field of $field_rad rad", async (given) => {
    const { survey } = observe({
      channelWidth: given.channel_width_hz ?? 1,
      integrationTime: given.integration_s ?? 0.1,
    });
    const plan = derivePlan(
      { weighting: { kind: "natural" }, fieldOfView: given.field_rad, correctsW: given.cause !== "w-term" },
      survey,
    );
    const { image } = await forecast(survey, plan);
    const limit = image.limits.find(({ cause }) => cause.endsWith(given.cause))!;
    expect(Math.abs(limit.dynamicRangeFraction / given.dynamic_range - 1)).toBeLessThan(IMAGE_TOLERANCE);
  });
});

itIsFresh("dynamic-range", 1e-6);
