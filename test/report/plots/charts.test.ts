import { decode } from "fast-png";
import { describe, expect, it } from "vitest";
import { amplitudeChart } from "../../../src/report/plots/amplitude.ts";
import { beamChart } from "../../../src/report/plots/beam.ts";
import { classifyCells } from "../../../src/report/plots/cells.ts";
import { phaseChart, phaseSubjects } from "../../../src/report/plots/phase.ts";
import { uvCoverageChart } from "../../../src/report/plots/uv-coverage.ts";
import { largestAllowedW, wDistanceChart } from "../../../src/report/plots/w-distance.ts";
import type { Check } from "../../../src/report/report.ts";
import { scopeWords } from "../../../src/report/scope.ts";
import { cleanCheck, faultyCheck, fixtureBeam } from "../fixtures.ts";

const check = faultyCheck();
const cells = classifyCells(check);
const words = scopeWords(check.dataset);

/** The faulty check with the cells of its first baselines only. */
function firstBaselines(count: number): Check {
  const last = count * 120;
  const { tracks } = check.survey;
  const cut = Object.fromEntries(
    Object.entries(tracks).map(([key, value]) => [
      key,
      typeof value === "number" || key === "firstCell"
        ? value
        : value.slice(0, (value.length / tracks.cells) * last),
    ]),
  ) as unknown as typeof tracks;
  return { ...check, survey: { ...check.survey, tracks: { ...cut, cells: last } } };
}

/** Dots and segments of one colour: a path begins each with M. */
function marks(svg: string, colour: string): number {
  const path = new RegExp(`<path[^>]*stroke="var\\(--${colour}\\)"[^>]*>`).exec(svg)?.[0] ?? "";
  return /d="([^"]*)"/.exec(path)?.[1]?.split("M").length ?? 1;
}

describe("every chart", () => {
  it.each([
    ["uv coverage", () => uvCoverageChart(check, cells)],
    ["amplitude", () => amplitudeChart(check, cells)],
    ["w", () => wDistanceChart(check, cells)],
    ["beam", () => beamChart(fixtureBeam(), check.image.weightings[1]!.before).svg],
    ["phase", () => phaseChart(check, phaseSubjects(check, words)[0]!, words)],
  ])("is the same text when drawn twice in a process, and has no number that is none: %s", (_, draw) => {
    const once = draw();
    expect(draw() === once).toBe(true);
    expect(once.match(/NaN|Infinity|undefined/g)).toBeNull();
    expect(once.match(/="[^"]*\d\.\d{3,}[^"]*"/g)).toBeNull();
  });
});

describe("uvCoverageChart", () => {
  it("draws each cell with its conjugate, one by one where they are few", () => {
    const few = firstBaselines(25);
    const svg = uvCoverageChart(few, classifyCells(few));
    const drawn = ["kept", "suggested", "flagged"].map((colour) => marks(svg, colour) - 1);
    expect(drawn[0]! + drawn[1]! + drawn[2]!).toBe(2 * 25 * 120);
  });

  it("draws many cells as the squares they touch, the same on both sides of the origin", () => {
    const svg = uvCoverageChart(check, cells);
    const squares = [...svg.matchAll(/M([\d.]+) ([\d.]+)h([\d.]+)v1\.5/g)].map((match) =>
      match.slice(1, 4).map(Number),
    );
    expect(squares.length).toBeGreaterThan(500);
    const weight = squares.reduce((sum, [x, , width]) => sum + width! * (x! + width! / 2), 0);
    const area = squares.reduce((sum, [, , width]) => sum + width!, 0);
    const frame = /<rect[^>]*>/.exec(svg);
    expect(frame).toBeNull();
    // The middle of a plotting area of 426 units that begins at 46.
    expect(Math.abs(weight / area - (46 + 426 / 2))).toBeLessThan(1.5);
  });
});

describe("wDistanceChart", () => {
  it("draws the limit of the planned field", () => {
    // |phase| = 2 pi w (1 - cos 0.75 deg) = 0.1 rad
    expect(largestAllowedW(check)).toBeCloseTo(
      0.1 / (2 * Math.PI * (1 - Math.cos((0.75 * Math.PI) / 180))),
      3,
    );
    expect(wDistanceChart(check, cells)).toContain("limit: 5.73 deg at the edge");
  });

  it("leaves a limit out that lies far above the data", () => {
    const field = { ...check.plan.fieldOfView, value: check.plan.fieldOfView.value / 100 };
    const narrow = { ...check, plan: { ...check.plan, fieldOfView: field } };
    expect(wDistanceChart(narrow, cells)).not.toContain("limit:");
  });
});

describe("beamChart", () => {
  const picture = (svg: string) => decode(Buffer.from(/base64,([^"]+)/.exec(svg)![1]!, "base64"));

  it("has east at the left and north at the top", () => {
    const beam = fixtureBeam(11);
    beam.pixels.fill(0);
    beam.pixels[5 * 11 + 5] = 1;
    // Row 0 is south and column 0 is east: one cell from the south-east corner of the sky.
    beam.pixels[1 * 11 + 1] = -0.5;
    const { data, width, height } = picture(beamChart(beam, undefined).svg);
    expect([width, height]).toEqual([11, 11]);
    const opacity = (row: number, column: number) => data[(row * 11 + column) * 4 + 3];
    expect(opacity(9, 1)).toBeGreaterThan(0);
    expect(opacity(1, 9)).toBe(0);
    expect(opacity(5, 5)).toBe(255);
  });

  it("tells negative from positive by colour and leaves zero to the page", () => {
    const beam = fixtureBeam(5);
    beam.pixels.set([1, -1, 0, Number.NaN], 20);
    const { data } = picture(beamChart(beam, undefined).svg);
    expect([...data.subarray(0, 4)]).toEqual([213, 94, 0, 255]);
    expect([...data.subarray(4, 8)]).toEqual([0, 114, 178, 255]);
    expect([data[11], data[15]]).toEqual([0, 0]);
  });

  it("shows the middle of a picture that is larger than a page needs", () => {
    const { width } = picture(beamChart(fixtureBeam(401), undefined).svg);
    expect(width).toBe(301);
  });
});

describe("phaseSubjects", () => {
  it("takes the antenna at fault and its baselines that show the phase best", () => {
    const [subject, ...others] = phaseSubjects(check, words);
    expect(others).toEqual([]);
    expect(subject).toMatchObject({ name: "antenna Q07", antenna: 7 });
    expect(subject!.baselines).toHaveLength(4);
    for (const baseline of subject!.baselines) {
      const { antenna1, antenna2 } = check.survey.baselines[baseline]!;
      expect([antenna1, antenna2]).toContain(7);
      expect([antenna1, antenna2]).not.toContain(11);
    }
  });

  it("shows the strongest baselines of data without a fault", () => {
    expect(phaseSubjects(cleanCheck(), words)[0]).toMatchObject({
      name: "the strongest baselines",
      events: [],
    });
  });

  it("marks the jump with its size", () => {
    expect(phaseChart(check, phaseSubjects(check, words)[0]!, words)).toContain("42.1 deg");
  });
});
