/**
 * The w term against images of a source at the field's edge made by direct sums in NumPy (w-term.py), and against stored
 * values of its phase, field and planes (w-term-check-values.json, with the provenance of each).
 */
import { describe, expect, it } from "vitest";
import { facetsNeeded, planesNeeded, uncorrectedField, wPhase } from "../../src/geometry/w-term.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { observedArray } from "../imaging/observed-array.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface Case {
  name: string;
  declination_deg: number;
  first_hour: number;
  last_hour: number;
  integrations: number;
  field_deg: number;
  largest_w: number;
  peaks: number[];
  shifts_rad: number[];
}
const reference = stored<{
  latitude_deg: number;
  frequency_hz: number;
  antennas_enu_m: [number, number, number][];
  cases: Case[];
}>("w-term");

interface Entry {
  id: string;
  inputs: Record<string, number>;
  expected: Record<string, number> & Record<string, number>[];
}
const sheet = new Map(
  stored<{ entries: Entry[] }>("w-term-check-values").entries.map((entry) => [entry.id, entry]),
);
const RAD = Math.PI / 180;

describe("a source at the edge of the field, w not corrected", () => {
  it.each(reference.cases)("loses the peak that its image loses: $name", async (given) => {
    const { survey } = observedArray({
      antennas: reference.antennas_enu_m,
      latitude: reference.latitude_deg,
      declination: given.declination_deg,
      hours: [given.first_hour, given.last_hour],
      integrations: given.integrations,
      frequency: reference.frequency_hz,
      channels: 1,
      polarizations: ["I"],
    });
    const plan = derivePlan({ fieldOfView: given.field_deg * RAD, weighting: { kind: "natural" } }, survey);
    const { image, measures } = await forecast(survey, plan);
    const { wTerm } = image;
    expect(wTerm.largestWavelengths / given.largest_w).toBeCloseTo(1, 6);
    for (const peak of given.peaks) expect(Math.abs(1 - wTerm.edgeLossFraction - peak)).toBeLessThan(0.003);
    const row = measures.find((measure) => measure.name === "image")!.table.object(0) as Record<
      string,
      number
    >;
    const shift = (row.w_shift_edge_arcsec! * RAD) / 3600;
    for (const expected of given.shifts_rad) expect(Math.abs(shift / expected - 1)).toBeLessThan(0.02);
  });
});

describe("w in closed form", () => {
  it("leaves the stored phases", () => {
    for (const { w_wavelengths, theta_deg, phase_rad } of sheet.get("w-term-phase")!.expected as Record<
      string,
      number
    >[]) {
      expect(wPhase(w_wavelengths!, Math.sin(theta_deg! * RAD)) / phase_rad!).toBeCloseTo(1, 8);
    }
  });

  it("needs no correction over the stored field", () => {
    const { inputs, expected } = sheet.get("w-criterion")!;
    const w = inputs.B_m! / inputs.lambda_m!;
    expect(uncorrectedField(w, 0.1) / RAD / expected.full_field_for_0p1_rad_deg!).toBeCloseTo(1, 6);
    expect(uncorrectedField(w, 1) / 2 / RAD / expected.half_field_for_1_rad_deg!).toBeCloseTo(1, 6);
  });

  it("needs the stored number of planes", () => {
    const { inputs, expected } = sheet.get("w-planes")!;
    const planes = planesNeeded(
      inputs.w_max_wavelengths!,
      Math.sin(inputs.theta_max_rad!),
      inputs.phase_tolerance_rad!,
    );
    expect(Math.abs(planes - expected.planes_minus_wmax_to_wmax!)).toBeLessThanOrEqual(1);
  });

  it("needs as many facets as uncorrected fields cover the field", () => {
    const open = uncorrectedField(10_000, 0.1);
    expect(facetsNeeded(10_000, open, 0.1)).toBe(1);
    expect(facetsNeeded(10_000, 3 * open, 0.1)).toBe(9);
  });
});

itIsFresh("w-term", 1e-4);
