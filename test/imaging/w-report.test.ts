import { describe, expect, it } from "vitest";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { type ArrayOptions, observedArray, threeArms } from "./observed-array.ts";

const C = 299792458;
const FIELD = 0.03;
type Row = Record<string, number>;

async function measuresOf(options: Partial<ArrayOptions>, fieldOfView = FIELD, dishDiameter = 25) {
  const observed = observedArray({
    antennas: threeArms(500, 3, 2),
    integrations: 12,
    channels: 2,
    ...options,
  });
  const plan = derivePlan({ fieldOfView, dishDiameter }, observed.survey);
  const { measures, image } = await forecast(observed.survey, plan);
  const rows = (name: string) => measures.find((measure) => measure.name === name)!.table.objects() as Row[];
  return { observed, image, rows };
}

describe("w by baseline", () => {
  it("has each baseline's extremes, phase and coherence at the edge", async () => {
    const { observed, rows } = await measuresOf({});
    const depth = 1 - Math.sqrt(1 - Math.sin(FIELD / 2) ** 2);
    for (const row of rows("baseline_w")) {
      const own = observed.rows.filter((r) => r.antenna1 === row.antenna1 && r.antenna2 === row.antenna2);
      const [low, high] = observed.frequencies;
      const spacing = own.map(({ u, v }) => Math.hypot(u, v));
      expect(row.uv_max_wavelengths! / (Math.max(...spacing) * high!)).toBeCloseTo(1, 9);
      expect(row.uv_min_wavelengths! / (Math.min(...spacing) * low!)).toBeCloseTo(1, 9);
      const w = Math.max(...own.map((r) => Math.abs(r.w))) * high!;
      expect(row.w_max_wavelengths! / w).toBeCloseTo(1, 9);
      expect(row.w_phase_edge! / (2 * Math.PI * w * depth)).toBeCloseTo(1, 6);
      const cosines = own.map((r) => Math.cos(2 * Math.PI * r.w * ((low! + high!) / 2) * depth));
      const mean = cosines.reduce((sum, value) => sum + value, 0) / cosines.length;
      expect(row.w_loss_edge!).toBeCloseTo(1 - mean, 4);
      expect(row.weight_fraction).toBeCloseTo(1 / 36, 6);
    }
  });

  it("lays a shadow on baselines projected to less than a dish, for the share of their time", async () => {
    const { observed, rows } = await measuresOf(
      {
        antennas: [
          [0, 0, 0],
          [60, 0, 0],
          [800, 300, 0],
        ],
        declination: 10,
        hours: [-6, 6],
        integrations: 60,
      },
      FIELD,
      25,
    );
    const own = observed.rows.filter(({ antenna1, antenna2 }) => antenna1 === 1 && antenna2 === 2);
    const hidden = own.filter(({ u, v }) => Math.hypot(u, v) * C < 25).length;
    expect(hidden).toBeGreaterThan(2);
    const [row] = rows("baseline_w");
    expect(row!.shadowed).toBeCloseTo(hidden / 60, 9);
    expect(rows("baseline_w")[1]!.shadowed).toBe(0);
  });

  it("gives an antenna the largest of its baselines", async () => {
    const { rows } = await measuresOf({});
    const baselines = rows("baseline_w");
    for (const { antenna, w_max_wavelengths } of rows("antenna_w")) {
      const own = baselines.filter(({ antenna1, antenna2 }) => antenna1 === antenna || antenna2 === antenna);
      expect(w_max_wavelengths).toBe(Math.max(...own.map((row) => row.w_max_wavelengths!)));
    }
  });
});

describe("snapshots", () => {
  it("take up the w of a flat array and leave the heights of an array with relief", async () => {
    const flat = await measuresOf({ antennas: threeArms(500, 3, 0) });
    for (const row of flat.rows("snapshot")) {
      expect(row.residual_rms_m).toBeLessThan(1e-6);
      expect(row.absorbed_fraction).toBeCloseTo(1, 9);
      expect(row.plane_known).toBe(1);
    }
    const relief = await measuresOf({});
    for (const row of relief.rows("snapshot")) {
      // Heights of up to 2 m, seen under up to 45 degrees from the zenith.
      expect(row.residual_max_m).toBeGreaterThan(0.5);
      expect(row.residual_max_m).toBeLessThan(8);
      expect(row.residual_phase_edge).toBeLessThan(row.w_phase_edge!);
    }
    expect(relief.rows("snapshot")).toHaveLength(12);
  });

  it("are at most 200, evenly through the times", async () => {
    const { observed, rows } = await measuresOf({ antennas: threeArms(500, 2, 0), integrations: 450 });
    const snapshots = rows("snapshot");
    expect(snapshots).toHaveLength(200);
    expect(snapshots[0]!.time_start).toBe(observed.survey.times[0]);
    expect(snapshots[100]!.time_start).toBe(observed.survey.times[225]);
  });

  it("put rows together whose times differ by a jitter of the file", async () => {
    const jittered = observedArray({ antennas: threeArms(500, 2, 0), integrations: 5, channels: 1 });
    const { survey } = jittered;
    const time = survey.tracks.time.map((value, cell) => value + ((cell % 3) * 0.005) / 86400);
    const shaken = { ...survey, tracks: { ...survey.tracks, time } };
    const { measures } = await forecast(shaken, derivePlan({}, shaken));
    const snapshots = measures.find(({ name }) => name === "snapshot")!.table.objects() as Row[];
    expect(snapshots).toHaveLength(5);
    expect(snapshots[0]!.time_end! - snapshots[0]!.time_start!).toBeCloseTo(0.01 / 86400, 9);
  });
});

describe("the ways out of a w term", () => {
  it("are laid out with numbers when the imager does not correct it", async () => {
    const { image } = await measuresOf({}, 0.015);
    const names = image.advice.map(({ name }) => name);
    expect(names).toContain("Either correct w");
    expect(names).toContain("or narrow the field");
    expect(names).toContain("or drop baselines");
    const drop = image.advice.find(({ name }) => name === "or drop baselines")!;
    expect(drop.value).toMatch(/^\d+ of 36$/);
    expect(drop.why).toMatch(/the beam grows by .* % and .* % of the sensitivity is lost/);
    expect(image.limits.some(({ cause }) => cause === "w-term")).toBe(image.wTerm.edgeLossFraction > 0.01);
  });

  it("are a cost in planes alone when it does", async () => {
    const { survey } = observedArray({ antennas: threeArms(500, 3, 2), integrations: 12, channels: 2 });
    const { image } = await forecast(survey, derivePlan({ fieldOfView: FIELD, correctsW: true }, survey));
    expect(image.advice.find(({ name }) => name === "w planes or facets")!.value).toMatch(
      /^\d+ planes or \d+ facets$/,
    );
    expect(image.advice.some(({ name }) => name === "or drop baselines")).toBe(false);
    expect(image.limits.some(({ cause }) => cause === "w-term")).toBe(false);
  });
});
