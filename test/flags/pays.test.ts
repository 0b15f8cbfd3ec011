import { describe, expect, it } from "vitest";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import type { FlagEntry } from "../../src/flags/entry.ts";
import { payingFlags } from "../../src/flags/pays.ts";
import type { Judgement } from "../../src/rules/finding.ts";

const flag = (id: string, rule: string): FlagEntry => ({
  ...EVERYTHING,
  id,
  rule,
  reason: `${rule} was seen`,
  antennas: [Number(id.slice(1))],
  samples: 10,
  fraction: 0.01,
  confidence: 0.9,
  cost: {
    sensitivityLossFraction: 0.01,
    beamMajorChangeFraction: 0,
    beamMinorChangeFraction: 0,
    peakSidelobeChangeFraction: 0,
    largestGapChangeFraction: 0,
  },
});
const judged = (score: number, taken: Record<string, number>): Judgement => ({
  score,
  verdict: "caution",
  findings: [],
  taken: Object.entries(taken).map(([rule, points]) => ({ rule, points })),
  notJudged: [],
});
const flags = [flag("F1", "silent-antenna"), flag("F2", "phase-noise"), flag("F3", "burst")];

describe("payingFlags", () => {
  it("keeps all of them where the score does not fall", () => {
    const { flags: kept, doubts } = payingFlags(flags, judged(60, {}), judged(60, {}));
    expect(kept).toEqual(flags);
    expect(doubts).toEqual([]);
  });

  it("offers as doubts, where the score falls, those whose rule took fewer points than the fall", () => {
    const before = judged(80, { "silent-antenna": 12, "phase-noise": 1, burst: 9 });
    const { flags: kept, doubts } = payingFlags(flags, before, judged(75, {}));
    expect(kept.map(({ id, rule }) => [id, rule])).toEqual([
      ["F1", "silent-antenna"],
      ["F2", "burst"],
    ]);
    expect(doubts).toEqual([
      {
        selection: { ...EVERYTHING, antennas: [2] },
        rule: "phase-noise",
        reason: "phase-noise was seen",
        why: "dropping it would cost the image more than the fault does",
      },
    ]);
  });
});
