import { describe, expect, it } from "vitest";
import { EVERYTHING } from "../../../src/dataset/selection.ts";
import { classifyCells, FLAGGED, KEPT, SUGGESTED, someCells } from "../../../src/report/plots/cells.ts";
import { channelShares, shares } from "../../../src/report/plots/flagged.ts";
import { INTEGRATIONS } from "../fixture-survey.ts";
import { cleanCheck, faultyCheck } from "../fixtures.ts";

const check = faultyCheck();
const cells = classifyCells(check);
const count = (fates: Uint8Array, fate: number) => fates.filter((value) => value === fate).length;

describe("classifyCells", () => {
  it("tells cells that are flagged already from those that suggested flags take and those that stay", () => {
    // 15 of 120 integrations are flagged on all 91 baselines; of the others, antenna 11's 13 baselines are suggested
    // whole, and antenna 7's other 12 baselines for the 26 integrations of the jump.
    expect(count(cells.fate, FLAGGED)).toBe(15 * 91);
    expect(count(cells.fate, SUGGESTED)).toBe(105 * 13 + 26 * 12);
    expect(count(cells.fate, KEPT)).toBe(105 * 78 - 26 * 12);
  });

  it("adds up to the samples of the survey, each counted at both its antennas", () => {
    const sum = [...cells.antennas.values()].reduce(
      (all, fate) => all + fate.kept + fate.suggested + fate.flagged + fate.bad,
      0,
    );
    expect(sum).toBeCloseTo(2 * check.survey.totals.samples, 3);
  });

  it("counts every usable sample of a suggested antenna as suggested", () => {
    const silent = shares(cells.antennas.get(11)!);
    expect(silent.flagged + silent.bad + silent.suggested).toBeCloseTo(1, 9);
  });

  it("counts a sample that two flags take once", () => {
    const flags = [...check.flags, { ...check.flags[2]!, ...EVERYTHING, antennas: [11], id: "F4" }];
    const twice = classifyCells({ ...check, flags });
    expect([...twice.antennas]).toEqual([...cells.antennas]);
  });

  it("finds nothing suggested where nothing is", () => {
    const clean = classifyCells(cleanCheck());
    expect(count(clean.fate, SUGGESTED)).toBe(0);
    expect(clean.channelCover.every((share) => share === 0)).toBe(true);
  });
});

describe("channelShares", () => {
  it("shows flagged edges, suggested channels, and what flags on antennas take of every channel", () => {
    const channels = channelShares(check, cells);
    expect(channels[0]!.flagged).toBe(1);
    const lost = 15 / INTEGRATIONS;
    expect(channels[5]!.flagged).toBeCloseTo(lost, 9);
    const cover = (13 * 120 + 12 * 26) / (91 * 120);
    expect(channels[5]!.suggested).toBeCloseTo((1 - lost) * cover, 9);
    expect(channels[32 + 22]!.suggested).toBeCloseTo(1 - lost, 9);
  });
});

describe("someCells", () => {
  it("takes every n-th cell, the same every time, and all where they are few", () => {
    expect(someCells(check.survey, 3500)).toHaveLength(Math.ceil(10_920 / 4));
    expect(someCells(check.survey, 3500)).toEqual(someCells(check.survey, 3500));
    expect(someCells(check.survey, 20_000)).toHaveLength(10_920);
  });
});

describe("products that a file never fills", () => {
  it("are absent, not lost, and counted nowhere", () => {
    const { tracks } = check.survey;
    const usable = Uint32Array.from(tracks.usable, (count, at) => (at % 2 === 1 ? 0 : count));
    const zero = Uint32Array.from(tracks.usable, (count, at) => (at % 2 === 1 ? count : 0));
    const half = classifyCells({
      ...check,
      survey: { ...check.survey, tracks: { ...tracks, usable, zero } },
    });
    expect(half.present).toEqual([true, false]);
    expect(shares(half.antennas.get(5)!).bad).toBeCloseTo(shares(cells.antennas.get(5)!).bad, 9);
    expect(count(half.fate, FLAGGED)).toBe(15 * 91);
  });
});
