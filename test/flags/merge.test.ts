import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { EVERYTHING, type Selection } from "../../src/dataset/selection.ts";
import type { Candidate } from "../../src/flags/candidate.ts";
import { mergeCandidates, withoutInner } from "../../src/flags/merge.ts";
import { canonical, contains, sameConcern } from "../../src/flags/selection-algebra.ts";
import { samplesOf, selection, TIMES } from "./selections.ts";

function candidate(parts: Partial<Selection>, more: Partial<Candidate> = {}): Candidate {
  return {
    selection: { ...EVERYTHING, ...parts },
    rule: "burst",
    confidence: 0.9,
    severity: 0.5,
    excess: null,
    reasons: ["seen"],
    repair: null,
    ...more,
  };
}

const merge = (...candidates: Candidate[]) => mergeCandidates(candidates, TIMES);
const selections = (candidates: readonly Candidate[]) => candidates.map((one) => one.selection);

describe("mergeCandidates", () => {
  it("joins time ranges that no integration parts, and leaves those that one does", () => {
    const [first, second, , last] = TIMES as unknown as [number, number, number, number];
    const joined = merge(candidate({ time: [first, first] }), candidate({ time: [second, second] }));
    expect(selections(joined)).toEqual([{ ...EVERYTHING, time: [first, second] }]);
    expect(merge(candidate({ time: [first, second] }), candidate({ time: [last, last] }))).toHaveLength(2);
  });

  it("joins channels, sub-bands, polarizations and baselines of the same time", () => {
    expect(selections(merge(candidate({ channels: [[0, 1]] }), candidate({ channels: [[2, 2]] })))).toEqual([
      { ...EVERYTHING, channels: [[0, 2]] },
    ]);
    const corners = [0, 1].flatMap((subband) =>
      (["XX", "YY"] as const).map((name) =>
        candidate({ subbands: [subband], polarizations: [name], channels: [[1, 1]] }),
      ),
    );
    expect(selections(merge(...corners))).toEqual([
      { ...EVERYTHING, subbands: [0, 1], polarizations: ["XX", "YY"], channels: [[1, 1]] },
    ]);
    expect(selections(merge(candidate({ baselines: [[1, 2]] }), candidate({ baselines: [[3, 1]] })))).toEqual(
      [
        {
          ...EVERYTHING,
          baselines: [
            [1, 2],
            [1, 3],
          ],
        },
      ],
    );
  });

  it("keeps two antennas apart, and two rules", () => {
    expect(merge(candidate({ antennas: [1] }), candidate({ antennas: [2] }))).toHaveLength(2);
    expect(
      merge(candidate({ subbands: [0] }), candidate({ subbands: [1] }, { rule: "dropout" })),
    ).toHaveLength(2);
  });

  it("is as sure as its least sure part and as severe as its worst, and says the worst first", () => {
    const [one] = merge(
      candidate({ channels: [[0, 0]] }, { confidence: 0.6, severity: 0.1, reasons: ["mild"] }),
      candidate(
        { channels: [[1, 1]] },
        { confidence: 0.8, severity: 1, reasons: ["bad"], repair: "mend it" },
      ),
    );
    expect(one).toMatchObject({ confidence: 0.6, severity: 1, reasons: ["bad", "mild"], repair: "mend it" });
  });

  it("drops what lies inside another of the same rule", () => {
    expect(merge(candidate({ antennas: [1] }), candidate({ antennas: [1], subbands: [1] }))).toHaveLength(1);
    expect(merge(candidate({ antennas: [1] }), candidate({ baselines: [[2, 1]] }))).toHaveLength(1);
    expect(withoutInner([candidate({}), candidate({})])).toHaveLength(1);
  });

  it("takes exactly the samples of its parts, in no more entries", async () => {
    await fc.assert(
      fc.asyncProperty(
        fc.array(fc.tuple(selection, fc.constantFrom("burst", "dropout")), { maxLength: 7 }),
        async (list) => {
          const candidates = list.map(([parts, rule]) => candidate(parts, { rule }));
          const merged = merge(...candidates);
          expect(merged.length).toBeLessThanOrEqual(candidates.length);
          expect(await samplesOf(selections(merged))).toEqual(await samplesOf(selections(candidates)));
          expect(await samplesOf(selections(withoutInner(candidates)))).toEqual(
            await samplesOf(selections(candidates)),
          );
        },
      ),
      { numRuns: 300 },
    );
  });

  it("is the same whatever order the candidates come in", () => {
    const lists = fc.array(selection, { maxLength: 6 });
    fc.assert(
      fc.property(
        lists.chain((list) =>
          fc.tuple(fc.constant(list), fc.shuffledSubarray(list, { minLength: list.length })),
        ),
        ([a, b]) => {
          const of = (list: readonly Selection[]) => merge(...list.map((parts) => candidate(parts)));
          expect(of(b)).toEqual(of(a));
        },
      ),
    );
  });

  it("does nothing to what was merged before", () => {
    fc.assert(
      fc.property(fc.array(selection, { maxLength: 6 }), (list) => {
        const once = merge(...list.map((parts) => candidate(parts)));
        expect(merge(...once)).toEqual(once);
      }),
    );
  });
});

describe("the algebra of selections", () => {
  it("finds one inside another only where its samples are", async () => {
    await fc.assert(
      fc.asyncProperty(selection, selection, async (outer, inner) => {
        if (!contains(outer, inner)) return;
        const both = await samplesOf([outer]);
        expect(await samplesOf([outer, inner])).toEqual(both);
      }),
      { numRuns: 500 },
    );
  });

  it("finds every selection inside itself and inside everything", () => {
    fc.assert(
      fc.property(selection, (one) => {
        expect(contains(canonical(one), one)).toBe(true);
        expect(contains(EVERYTHING, one)).toBe(true);
        expect(sameConcern(one, one)).toBe(true);
      }),
    );
  });

  it("keeps the samples of a selection made canonical", async () => {
    await fc.assert(
      fc.asyncProperty(selection, async (one) => {
        expect(await samplesOf([canonical(one)])).toEqual(await samplesOf([one]));
      }),
      { numRuns: 100 },
    );
  });

  it("tells antennas apart by who they are", () => {
    const antenna = (number: number) => ({ ...EVERYTHING, antennas: [number] });
    const baseline = { ...EVERYTHING, baselines: [[3, 7]] } as const;
    expect(sameConcern(antenna(3), antenna(7))).toBe(false);
    expect(sameConcern(antenna(3), baseline)).toBe(true);
    expect(sameConcern(antenna(4), baseline)).toBe(false);
    expect(sameConcern(EVERYTHING, baseline)).toBe(true);
    expect(sameConcern({ ...EVERYTHING, time: [1, 2] }, { ...EVERYTHING, time: [3, 4] })).toBe(false);
    expect(sameConcern({ ...EVERYTHING, channels: [[1, 2]] }, { ...EVERYTHING, channels: [[2, 4]] })).toBe(
      true,
    );
  });
});
