/**
 * Dirty beams against direct sums in NumPy (beam.py: no grid and no transform), and closed forms against SciPy's zeros of
 * Bessel functions (beam-check-values.json, with the provenance of each).
 */
import { describe, expect, it } from "vitest";
import { beamAt } from "../../src/imaging/beam-at.ts";
import { BeamMaker } from "../../src/imaging/beams.ts";
import { cellFactors, imagingWeight } from "../../src/imaging/cell-weights.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { MomentGrid } from "../../src/imaging/moment-grid.ts";
import { observedArray, type RowPlace } from "../imaging/observed-array.ts";
import { itIsFresh, stored } from "../support/fresh.ts";

interface Described {
  major_rad: number;
  minor_rad: number;
  position_angle_deg: number;
  peak_sidelobe: number;
  rms_sidelobe: number;
  noise_jy: number;
  values: { l_rad: number; m_rad: number; beam: number }[];
}
interface Reference {
  array: {
    antennas_enu_m: [number, number, number][];
    latitude_deg: number;
    declination_deg: number;
    first_hour: number;
    last_hour: number;
    integrations: number;
    frequencies_hz: number[];
    field_rad: number;
  };
  natural: Described;
  uniform: Described;
  robust: Described;
}
const reference = stored<Reference>("beam");
/** Of the peak. */
const BEAM_TOLERANCE = 1e-3;
const ARCSEC = Math.PI / 180 / 3600;

interface Entry {
  id: string;
  inputs: Record<string, unknown>;
  expected: Record<string, number> & number;
}
const sheet = new Map(
  stored<{ entries: Entry[] }>("beam-check-values").entries.map((entry) => [entry.id, entry]),
);
const expectedOf = (id: string) => sheet.get(id)!.expected;

/** As in the script: weights that differ, and an antenna that is flagged for a third of the time. */
function weightOf({ antenna1, antenna2, integration }: RowPlace, _: number, channel: number): number {
  const flagged = (antenna1 === 5 || antenna2 === 5) && integration % 3 === 0;
  return flagged ? 0 : 2 + ((antenna1 * antenna2 + integration + channel) % 4);
}

describe("beams of an array that rotates with the Earth, some samples flagged", () => {
  const { array } = reference;
  const [first, second] = array.frequencies_hz as [number, number, number];
  const observed = observedArray({
    antennas: array.antennas_enu_m,
    latitude: array.latitude_deg,
    declination: array.declination_deg,
    hours: [array.first_hour, array.last_hour],
    integrations: array.integrations,
    frequency: first,
    channelWidth: second - first,
    channels: 3,
    polarizations: ["I"],
    sigma: 1,
    weight: weightOf,
  });
  // The weights are true: the noise of every sample is 1/sqrt(weight).
  const survey = {
    ...observed.survey,
    levels: { ...observed.survey.levels, sigma: trueSigma(observed.survey) },
  };
  const plan = derivePlan({ fieldOfView: array.field_rad }, survey);
  const result = forecast(survey, plan);

  it.each(["natural", "uniform", "robust"] as const)("agree for %s weighting", async (weighting) => {
    const expected = reference[weighting];
    const { image } = await result;
    const beam = image.weightings.find((candidate) => candidate.weighting === weighting)!.before;
    expect((beam.majorArcsec * ARCSEC) / expected.major_rad).toBeCloseTo(1, 2);
    expect((beam.minorArcsec * ARCSEC) / expected.minor_rad).toBeCloseTo(1, 2);
    expect(beam.positionAngleDeg).toBeCloseTo(expected.position_angle_deg, 0);
    expect(beam.peakSidelobeFraction).toBeCloseTo(expected.peak_sidelobe, 3);
    // The script's pixels are coarser.
    expect(beam.rmsSidelobeFraction / expected.rms_sidelobe).toBeCloseTo(1, 1.6);
    expect(beam.noiseJy / expected.noise_jy).toBeCloseTo(1, 2);
  });

  it.each(["natural", "uniform", "robust"] as const)(
    "agree at places all over the field to 1e-3 of the peak for %s weighting",
    (weighting) => {
      const grid = new MomentGrid({
        field: array.field_rad,
        half: 60,
        order: 5,
        weightBound: 1e6,
        noiseBound: 0,
      });
      observed.rows.forEach((row) => {
        array.frequencies_hz.forEach((frequency, channel) => {
          const weight = weightOf(row, 0, channel);
          if (weight > 0) grid.add(row.u * frequency, row.v * frequency, weight, 0);
        });
      });
      const cells = grid.cells();
      const factors = cellFactors(
        cells,
        weighting === "robust" ? { kind: weighting, robust: 0 } : { kind: weighting },
      );
      for (const { l_rad, m_rad, beam } of reference[weighting].values) {
        const ours = beamAt(cells, factors, imagingWeight(cells, factors), l_rad, m_rad);
        expect(Math.abs(ours - beam)).toBeLessThan(BEAM_TOLERANCE);
      }
    },
  );
});

/** Weights are counted in the levels by their mean: the noise that belongs to it. */
function trueSigma(survey: ReturnType<typeof observedArray>["survey"]): Float32Array {
  const { tracks, baselines, levels } = survey;
  const sigma = new Float32Array(levels.sigma.length);
  const channels = sigma.length / baselines.length;
  for (let b = 0; b < baselines.length; b++) {
    let [sum, count] = [0, 0];
    for (let cell = tracks.firstCell[b]!; cell < tracks.firstCell[b + 1]!; cell++) {
      sum += tracks.weight[cell]!;
      count += tracks.usable[cell]!;
    }
    sigma.fill(1 / Math.sqrt(sum / count), b * channels, (b + 1) * channels);
  }
  return sigma;
}

describe("closed forms", () => {
  const natural = { kind: "natural" } as const;
  const beamOf = (points: readonly (readonly [number, number, number])[], field: number) => {
    const total = points.reduce((sum, [, , weight]) => sum + weight, 0);
    const extent = Math.max(...points.map(([u, v]) => Math.max(Math.abs(u), Math.abs(v))));
    const half = Math.ceil(extent * field) + 2;
    const grid = new MomentGrid({ field, half, order: 5, weightBound: 2 * total, noiseBound: 2 * total });
    for (const [u, v, weight] of points) grid.add(u, v, weight, weight);
    const cells = grid.cells();
    return new BeamMaker(cells.form).make(cells, natural);
  };

  it("has the half width and the first sidelobe of a ring, J0", () => {
    const q = 5000;
    const ring = Array.from({ length: 500 }, (_, k): [number, number, number] => {
      const angle = (Math.PI * (k + 0.25)) / 500;
      return [q * Math.cos(angle), q * Math.sin(angle), 1];
    });
    const { ellipse, sidelobes } = beamOf(ring, 5 / q);
    expect(ellipse.major * q).toBeCloseTo(expectedOf("beam-ring").fwhm_times_q!, 4);
    expect(sidelobes.peak).toBeCloseTo(expectedOf("beam-ring").first_sidelobe!, 4);
  });

  it("has the half width and the first sidelobe of a uniform disk, 2 J1(x)/x", () => {
    const q = 5000;
    const disk: [number, number, number][] = [];
    for (let ring = 0; ring < 80; ring++) {
      const radius = (q * (ring + 0.5)) / 80;
      const count = 8 * ring + 12;
      for (let k = 0; k < count; k++) {
        const angle = (Math.PI * (k + 0.5)) / count;
        disk.push([radius * Math.cos(angle), radius * Math.sin(angle), radius / count]);
      }
    }
    const { ellipse, sidelobes } = beamOf(disk, 6 / q);
    expect(ellipse.major * q).toBeCloseTo(expectedOf("beam-uniform-disk").fwhm_times_q!, 3);
    expect(sidelobes.peak).toBeCloseTo(expectedOf("beam-uniform-disk").first_sidelobe!, 3);
  });

  it("has the grating lobe of a regular line, where the field reaches it", () => {
    const line = Array.from({ length: 8 }, (_, k): [number, number, number] => [
      100 * (k + 1),
      20 * (-1) ** k,
      1,
    ]);
    const { sidelobes } = beamOf(
      line.flatMap(([u, v, weight]) => [[u, v, weight] as const, [u, -v, weight] as const]),
      0.0225,
    );
    expect(Math.abs(sidelobes.east)).toBeCloseTo(expectedOf("beam-1d-comb").grating_lobe_l_rad!, 4);
    expect(sidelobes.peak).toBeCloseTo(expectedOf("beam-1d-comb").beam_at_grating!, 3);
  });
});

itIsFresh("beam", 1e-5);
