import { describe, expect, it } from "vitest";
import { judgeCoverage, missedFlux, plannedSpacings } from "../../src/imaging/coverage.ts";
import { CoverageTally } from "../../src/imaging/coverage-tally.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { MomentGrid } from "../../src/imaging/moment-grid.ts";
import { observedArray, threeArms } from "./observed-array.ts";

const form = { shortest: 90, longest: 20_000, from: 100, to: 10_000 };
const RAD = Math.PI / 180;

function ring(tally: CoverageTally, radius: number, from = 0, to = 180, step = 0.2): void {
  for (let angle = from; angle < to; angle += step) {
    tally.add(Math.log(radius), Math.log(radius * 1.0001), angle * RAD);
  }
}

describe("radial gaps", () => {
  it("are found with their exact edges", () => {
    const tally = new CoverageTally(form);
    for (const radius of [200, 201, 1000, 5000]) ring(tally, radius, 0, 180, 10);
    const gaps = tally.radialGaps(50);
    expect(gaps.map(({ to }) => to)).toEqual([1000, 5000].map((radius) => expect.closeTo(radius, 6)));
    expect(gaps[0]!.from).toBeCloseTo(201 * 1.0001, 6);
    expect(gaps[1]!.from).toBeCloseTo(1000 * 1.0001, 6);
    expect(tally.extent().shortest).toBeCloseTo(200, 6);
    expect(tally.extent().longest).toBeCloseTo(5000 * 1.0001, 6);
  });

  it("narrower than the fringe of the field are none", () => {
    const tally = new CoverageTally(form);
    for (const radius of [1000, 1080, 2000]) ring(tally, radius, 0, 180, 10);
    expect(tally.radialGaps(100)).toHaveLength(1);
    expect(tally.radialGaps(10)).toHaveLength(2);
  });

  it("close where a band of channels covers them", () => {
    const tally = new CoverageTally(form);
    tally.add(Math.log(1000), Math.log(2500), 0);
    tally.add(Math.log(2400), Math.log(4000), 0);
    expect(tally.radialGaps(1)).toEqual([]);
  });
});

describe("azimuthal gaps", () => {
  it("are found to a quarter of a degree, with their direction", () => {
    const tally = new CoverageTally(form);
    // North-east to south-east is missing on every ring: 40 to 110 degrees.
    for (let radius = 120; radius < 10_000; radius *= 1.1) {
      ring(tally, radius, 110, 220);
    }
    const annuli = tally.azimuthalGaps(1);
    expect(annuli.length).toBeGreaterThan(3);
    for (const { gap, at } of annuli) {
      expect(Math.abs(gap / RAD - 70)).toBeLessThan(0.6);
      expect(Math.abs(at / RAD - 75)).toBeLessThan(0.6);
    }
  });

  it("do not count where the arc is shorter than the fringe of the field", () => {
    const tally = new CoverageTally(form);
    for (let radius = 120; radius < 10_000; radius *= 1.1) ring(tally, radius, 0, 170);
    const annuli = tally.azimuthalGaps(200);
    expect(annuli[0]!.gap).toBe(0);
    expect(annuli.at(-1)!.gap).toBeGreaterThan(0);
  });

  it("of a few samples in the middle are joined with what is around them", () => {
    const tally = new CoverageTally(form);
    for (let radius = 1000; radius < 10_000; radius *= 1.1) ring(tally, radius);
    // One short track.
    ring(tally, 130, 10, 12);
    const [inner] = tally.azimuthalGaps(1);
    expect(inner!.from).toBeCloseTo(100, 6);
    expect(inner!.to).toBeGreaterThan(1000);
    expect(inner!.gap).toBeLessThan(1 * RAD);
  });
});

describe("a tally without a part of it", () => {
  it("is that of the rest", () => {
    const all = new CoverageTally(form);
    const part = new CoverageTally(form);
    const rest = new CoverageTally(form);
    for (const radius of [150, 300, 700, 1500, 6000]) {
      for (const tally of [all, radius === 700 ? part : rest]) ring(tally, radius, 0, 90, 1);
    }
    expect(all.without(part).radialGaps(10)).toEqual(rest.binned().radialGaps(10));
    expect(all.without(part).azimuthalGaps(1)).toEqual(rest.azimuthalGaps(1));
  });

  it("is empty without all", () => {
    const all = new CoverageTally(form);
    ring(all, 500);
    const none = all.without(all);
    expect(none.radialGaps(1)).toEqual([]);
    expect(none.extent().longest).toBeNaN();
    expect(none.azimuthalGaps(1).every(({ empty }) => empty)).toBe(true);
  });
});

describe("coverage against a plan", () => {
  const { survey } = observedArray({ antennas: threeArms(900, 3), integrations: 10, channels: 2 });

  it("has nothing missing at the ends when the plan follows from the data", async () => {
    const plan = derivePlan({}, survey);
    const { image, measures } = await forecast(survey, plan);
    const row = measures.find(({ name }) => name === "image")!.table.object(0) as Record<string, number>;
    expect(row.longest_ratio).toBeCloseTo(1, 9);
    expect(row.shortest_ratio).toBeCloseTo(1, 9);
    // 0.6 lambda/b: the shortest spacing sees 28 % of a Gaussian (scale check values).
    expect(image.coverage.before.missingFluxFraction).toBeCloseTo(1 - 0.277622, 5);
  });

  it("names what lacks below the shortest and above the longest spacing", async () => {
    const plan = derivePlan({ largestScale: 0.01, resolution: 2e-5, fieldOfView: 0.02 }, survey);
    const { measures, image } = await forecast(survey, plan);
    const kinds = measures.find(({ name }) => name === "radial_gap")!.table.array("kind") as string[];
    expect(kinds).toContain("short");
    expect(kinds).toContain("long");
    const row = measures.find(({ name }) => name === "image")!.table.object(0) as Record<string, number>;
    expect(row.shortest_ratio).toBeGreaterThan(1);
    expect(row.longest_ratio).toBeLessThan(1);
    const { shortestSpacingWavelengths, missingFluxFraction } = image.coverage.before;
    expect(missingFluxFraction).toBe(missedFlux(0.01, shortestSpacingWavelengths));
  });

  it("is also that of the data before they were flagged", async () => {
    const antennas = threeArms(900, 4);
    const whole = observedArray({ antennas, integrations: 12, channels: 2 });
    const flagged = observedArray({
      antennas,
      integrations: 12,
      channels: 2,
      // The ends of the arms are flagged, all the time.
      weight: ({ antenna1, antenna2 }) => (antenna1 % 4 === 0 || antenna2 % 4 === 0 ? -4 : 4),
    });
    const plan = derivePlan({ resolution: 1.5e-4, fieldOfView: 0.01, largestScale: 0.001 }, whole.survey);
    const rowOf = async (data: typeof whole) => {
      const { measures, image } = await forecast(data.survey, plan);
      return {
        image,
        row: measures.find(({ name }) => name === "image")!.table.object(0) as Record<string, number>,
      };
    };
    const all = await rowOf(whole);
    const left = await rowOf(flagged);
    expect(all.row.unflagged_filled_fraction).toBe(all.row.filled_fraction);
    expect(left.row.filled_fraction).toBeLessThan(0.7 * all.row.filled_fraction!);
    expect(left.row.unflagged_filled_fraction).toBe(all.row.filled_fraction);
    expect(left.row.longest_wavelengths).toBeLessThan(0.8 * all.row.longest_wavelengths!);
    expect(left.row.unflagged_longest_wavelengths! / all.row.longest_wavelengths!).toBeCloseTo(1, 2);
    const advice = left.image.advice.find(({ name }) => name === "Flags already set")!;
    expect(advice.why).toContain("the longest spacing from");
    expect(all.image.advice.some(({ name }) => name === "Flags already set")).toBe(false);
  });

  it("counts the filled cells between the planned scales as counting one by one does", () => {
    const plan = derivePlan({ fieldOfView: 0.01, largestScale: 0.0008, resolution: 1e-4 }, survey);
    const { from, to } = plannedSpacings(plan);
    const grid = new MomentGrid({ field: 0.01, half: 120, order: 0, weightBound: 1e4, noiseBound: 0 });
    const filled = new Set<string>();
    for (let k = 0; k < 500; k++) {
      const [u, v] = [(k * 7919) % 9000, ((k * 104_729) % 16_000) - 8000];
      grid.add(u, v, 1, 0);
      filled.add(`${Math.floor(u * 0.01 + 0.5)},${Math.floor(v * 0.01 + 0.5)}`);
    }
    let [inside, all] = [0, 0];
    for (let iu = 0; iu <= 120; iu++) {
      for (let iv = -120; iv <= 120; iv++) {
        const radius = Math.hypot(iu, iv) / 0.01;
        if (radius < from || radius > to || (iu === 0 && iv <= 0)) continue;
        all += 1;
        if (filled.has(`${iu},${iv}`) || (iu === 0 && filled.has(`0,${-iv}`))) inside += 1;
      }
    }
    const tally = new CoverageTally(form);
    ring(tally, 500);
    expect(judgeCoverage(tally, grid.cells(), plan).coverage.filledFraction).toBeCloseTo(inside / all, 12);
  });
});
