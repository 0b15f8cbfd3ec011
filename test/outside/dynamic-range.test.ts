/**
 * Caps on the dynamic range against images with phase errors summed directly in NumPy (dynamic-range.py), and against the
 * published relations (dynamic-range-check-values.json, with their provenance).
 */
import { describe, expect, it } from "vitest";
import { EVERYTHING, type Selection } from "../../src/dataset/selection.ts";
import type { DetectedEvent } from "../../src/detect/event.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { snapshotDynamicRange } from "../../src/imaging/limits.ts";
import { observedArray } from "../imaging/observed-array.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

const reference = stored<{
  snapshot: {
    antennas: number;
    error_rad: number;
    dynamic_range: Record<"baseline" | "antenna" | "baselines" | "antennas", number>;
  };
  rotating: {
    antennas_enu_m: [number, number, number][];
    latitude_deg: number;
    declination_deg: number;
    frequency_hz: number;
    field_rad: number;
    first_hour: number;
    last_hour: number;
    integrations: number;
    cases: {
      name: string;
      first_integration: number;
      last_integration: number;
      degrees: number;
      dynamic_range: number;
    }[];
  };
}>("dynamic-range");
const [sheet] = stored<{
  entries: { inputs: { N: number; error_rad: number }; expected: Record<string, number> }[];
}>("dynamic-range-check-values").entries;

function jump(scope: Partial<Selection>, degrees: number): DetectedEvent {
  return {
    kind: "phase-jump",
    cause: scope.antennas === undefined ? "baseline" : "antenna",
    scope: { ...EVERYTHING, ...scope },
    flag: null,
    size: degrees,
    sizeError: 1,
    unit: "deg",
    significance: 20,
    confidence: 1,
    samples: 1,
    outlying: 1,
    evidence: "",
    repair: null,
  };
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
    // 60 snapshots: the mean rms is known to a few per cent.
    expect(Math.abs(snapshotDynamicRange(of, antennas, error_rad) / dynamic_range[of] - 1)).toBeLessThan(
      0.05,
    );
  });
});

describe("the cap that an event puts on an image", () => {
  const { rotating } = reference;
  const observe = (integrations: number) =>
    observedArray({
      antennas: rotating.antennas_enu_m,
      latitude: rotating.latitude_deg,
      declination: rotating.declination_deg,
      frequency: rotating.frequency_hz,
      hours: [rotating.first_hour, rotating.last_hour],
      integrations,
      channels: 1,
      polarizations: ["I"],
    });

  it.each([
    ["baseline", { baselines: [[3, 9]] as [number, number][] }],
    ["antenna", { antennas: [5] }],
  ] as const)("is the published one of a snapshot for an error on one %s", async (of, scope) => {
    const { survey } = observe(1);
    const plan = derivePlan({ weighting: { kind: "natural" }, fieldOfView: rotating.field_rad }, survey);
    const { image } = await forecast(survey, plan, { events: [jump(scope, 4)] });
    const limit = image.limits.find(({ cause }) => cause === "phase-jump")!;
    const expected = snapshotDynamicRange(of, rotating.antennas_enu_m.length, (4 * Math.PI) / 180);
    expect(limit.dynamicRangeFraction / expected).toBeCloseTo(1, 2);
  });

  it.each(rotating.cases)("is that of the image: $name", async (given) => {
    const { survey } = observe(rotating.integrations);
    const plan = derivePlan({ weighting: { kind: "natural" }, fieldOfView: rotating.field_rad }, survey);
    const time = [survey.times[given.first_integration]!, survey.times[given.last_integration]!] as const;
    const antenna = /^antenna (\d+)/.exec(given.name);
    const scope =
      antenna === null ? { baselines: [[3, 9]] as [number, number][] } : { antennas: [Number(antenna[1])] };
    const { image } = await forecast(survey, plan, { events: [jump({ ...scope, time }, given.degrees)] });
    const limit = image.limits.find(({ cause }) => cause === "phase-jump")!;
    // The rms of one image at 4000 places, some of them near the source.
    expect(Math.abs(limit.dynamicRangeFraction / given.dynamic_range - 1)).toBeLessThan(0.08);
  });
});

itIsFresh("dynamic-range", 1e-6);
