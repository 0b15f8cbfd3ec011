/**
 * Scales and resolutions against numerical transforms in SciPy (scale.py) and tables of telescope handbooks
 * (scale-check-values.json, with the provenance of each).
 */
import { describe, expect, it } from "vitest";
import { missedFlux } from "../../src/imaging/coverage.ts";
import { derivePlan, scaleOfSpacing } from "../../src/imaging/derive-plan.ts";
import { observedArray } from "../imaging/observed-array.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

const reference = stored<{ gaussian: { scale_times_spacing: number; seen: number }[] }>("scale");
interface Entry {
  id: string;
  inputs: Record<string, number> & { theta_fwhm_times_b_over_lambda: number[] };
  expected: number & number[] & Record<string, number>;
}
const entries = stored<{ entries: Entry[] }>("scale-check-values").entries;
const sheet = new Map(entries.map((entry) => [entry.id, entry]));
const ARCSEC = Math.PI / 180 / 3600;
const MAS = ARCSEC / 1000;
const C = 299792458;

describe("missedFlux", () => {
  it.each(reference.gaussian)("leaves $seen of a Gaussian seen at $scale_times_spacing", (given) => {
    expect(1 - missedFlux(0.001, given.scale_times_spacing / 0.001)).toBeCloseTo(given.seen, 9);
  });

  it("has the stored values", () => {
    const { inputs, expected } = sheet.get("visibility-gaussian")!;
    inputs.theta_fwhm_times_b_over_lambda.forEach((product, i) => {
      expect(1 - missedFlux(1, product)).toBeCloseTo(expected[i]!, 9);
    });
  });
});

describe("the scales of a plan without values", () => {
  it("has the largest scale by 0.6 lambda over the shortest spacing", () => {
    const { inputs, expected } = sheet.get("las-conventions")!;
    expect(scaleOfSpacing(inputs.b_min_m! / inputs.lambda_m!) / ARCSEC).toBeCloseTo(expected["0.6"]!, 6);
    for (const id of ["handbook-1p5ghz-a", "handbook-1p5ghz-b"]) {
      const row = sheet.get(id)!;
      const wavelength = C / row.inputs.frequency_hz!;
      const scale = scaleOfSpacing((1000 * row.inputs.b_min_km!) / wavelength) / ARCSEC;
      expect(Math.abs(scale / row.expected.theta_las_arcsec! - 1)).toBeLessThan(0.1);
    }
  });

  // One factor does not describe every array: the handbook of a long-baseline array takes 1.0 lambda/B.
  it.each(entries.filter(({ id }) => id.startsWith("handbook-hpbw")))(
    "has the resolution of a handbook's table to its rounding: $id",
    ({ inputs, expected }) => {
      const wavelength = inputs.lambda_cm! / 100;
      // An east-west pair on the meridian of a source at the pole: all of it is projected.
      const { survey } = observedArray({
        antennas: [
          [0, 0, 0],
          [inputs.B_km! * 1000, 0, 0],
        ],
        hours: [0, 0],
        integrations: 1,
        declination: 90,
        channels: 1,
        frequency: C / wavelength,
      });
      const plan = derivePlan({}, survey);
      expect(Math.abs(plan.resolution.value / MAS / expected - 1)).toBeLessThan(0.15);
      expect(plan.resolution.value).toBeCloseTo(wavelength / (inputs.B_km! * 1000), 12);
    },
  );
});

itIsFresh("scale");
