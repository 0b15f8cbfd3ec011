import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { judge, MOST_FINDINGS_OF_A_RULE } from "../../src/rules/judge.ts";
import { measure, measures, PLAN, rule, ruleSet } from "./support.ts";

const antennas = (flagged: readonly unknown[]) =>
  measures(
    measure(
      "antenna",
      "antenna",
      { antenna: flagged.map((_, i) => i + 1), flagged },
      { flagged: "fraction" },
    ),
  );

const judged = (flagged: readonly unknown[], changes = {}) =>
  judge(ruleSet(rule(changes)), antennas(flagged), PLAN);

describe("judge", () => {
  it("finds each row past its caution limit, worst first, and leaves the others", () => {
    const result = judged([0.1, 0.4, 0.2, 0.9]);
    expect(result.findings.map(({ scope, verdict }) => [scope, verdict])).toEqual([
      [{ antennas: [4] }, "hold"],
      [{ antennas: [2] }, "caution"],
    ]);
    expect(result.findings[1]!.severity).toBeCloseTo(0.5, 12);
    expect(result.verdict).toBe("hold");
    expect(result.notJudged).toEqual([]);
    expect(result.hits.map((hit) => hit.row)).toEqual([1, 3]);
  });

  it("takes weight times the worst severity from the score, once a rule", () => {
    // Weight 0.5, worst severity 0.5: 100 (1 - 0.25).
    const result = judged([0.3, 0.4, 0.35]);
    expect(result.score).toBeCloseTo(75, 12);
    expect(result.taken).toEqual([{ rule: "made-up", points: expect.closeTo(25, 12) as number }]);
    expect(result.verdict).toBe("caution");
  });

  it("multiplies what the rules leave", () => {
    const two = ruleSet(rule(), rule({ id: "second", weight: "0.2", limits: "{ caution: 0, hold: 0.4 }" }));
    // 100 (1 - 0.5 x 0.5) (1 - 0.2 x 1).
    expect(judge(two, antennas([0.4]), PLAN).score).toBeCloseTo(60, 12);
  });

  it("holds when the score falls below 50 although no finding does", () => {
    const limits = "{ caution: 0, hold: 1 }";
    const two = ruleSet(rule({ limits, weight: "1" }), rule({ id: "second", limits, weight: "1" }));
    const result = judge(two, antennas([0.4]), PLAN);
    expect(result.findings.every((finding) => finding.verdict === "caution")).toBe(true);
    expect(result.score).toBeCloseTo(36, 12);
    expect(result.verdict).toBe("hold");
  });

  it("is ready with a score of 100 when nothing is past its limit", () => {
    expect(judged([0, 0.1, 0.2])).toMatchObject({
      score: 100,
      verdict: "ready",
      findings: [],
      notJudged: [],
    });
  });

  it("judges the other way when the hold limit is the smaller", () => {
    const result = judged([0.9, 0.4, 0.1], { limits: "{ caution: 0.6, hold: 0.2 }" });
    expect(result.findings.map(({ scope, verdict }) => [scope.antennas, verdict])).toEqual([
      [[3], "hold"],
      [[2], "caution"],
    ]);
    expect(result.findings[1]!.severity).toBeCloseTo(0.5, 12);
  });

  it("fills the consequence and gives its first number with the unit", () => {
    const [finding] = judged([0.75]).findings;
    // 1/sqrt(1 - 0.75) - 1 = 1.
    expect(finding!.consequence).toEqual({ text: "The noise rises by 100 %.", value: 1, unit: "fraction" });
    const consequence =
      "At {scope}, {value} of {plan.field_of_view}, twice {d.flagged}; {{so}} {count} past {caution}.";
    expect(judged([0.75], { consequence }).findings[0]!.consequence).toEqual({
      text: "At antenna 1, 75 % of 34.4 arcmin, twice 75 %; {so} 1 past 20 %.",
      value: 0.75,
      unit: "fraction",
    });
  });

  it("says which plan value set the limits, and the source", () => {
    const limits = "{ caution: 100 / plan.dynamic_range, hold: 0.6 }";
    expect(judged([0.5], { limits }).findings[0]!.limits).toEqual({
      caution: 0.1,
      hold: 0.6,
      unit: "fraction",
      from: "the plan's dynamic range (1000, given); common practice, no source",
    });
  });

  it("gathers more rows than a handful into one finding with the worst value", () => {
    const many = Array.from({ length: 20 }, (_, i) => (i % 2 === 0 ? 0 : 0.3 + i / 100));
    const { findings, hits } = judged(many);
    expect(hits).toHaveLength(10);
    expect(findings).toHaveLength(1);
    expect(findings[0]!.measured.value).toBeCloseTo(0.49, 12);
    expect(findings[0]!.scope).toEqual({ antennas: [2, 4, 6, 8, 10, 12, 14, 16, 18, 20] });
    expect(findings[0]!.evidence.join(" ")).toContain("10 of 20 are past the caution limit");
    expect(judged(new Array(MOST_FINDINGS_OF_A_RULE).fill(0.5)).findings).toHaveLength(
      MOST_FINDINGS_OF_A_RULE,
    );
  });

  it("gathers the rows of each thing that `each` names", () => {
    const channels = measure("channel", "channel", {
      subband: [0, 0, 1],
      channel_lo: [3, 8, 5],
      channel_hi: [4, 9, 5],
      flagged: [0.5, 0.7, 0.3],
    });
    const bySubband = rule({ measure: "channel", each: "subband" });
    const { findings } = judge(ruleSet(bySubband), measures(channels), PLAN);
    expect(findings.map(({ scope }) => scope)).toEqual([
      {
        subbands: [0],
        channels: [
          [3, 4],
          [8, 9],
        ],
      },
      { subbands: [1], channels: [[5, 5]] },
    ]);
    expect(findings[0]!.measured.value).toBe(0.7);
  });

  it("concerns only the rows that `where` names", () => {
    expect(judged([0.5, 0.9], { where: "d.antenna == 1" }).findings).toHaveLength(1);
    const off = judged([0.5, 0.9], { where: "plan.corrects_w" });
    expect(off).toMatchObject({ findings: [], notJudged: [], score: 100 });
  });

  it.each([
    ["a measure that is not there", measures(), {}, 'there is no measure "antenna" of this dataset'],
    ["a measure without rows", antennas([]), {}, 'the measure "antenna" has no rows'],
    [
      "a column that is not there",
      antennas([0.5]),
      { value: "d.flaged" },
      'has no column "flaged": did you mean "flagged"?',
    ],
    ["a column only the consequence names", antennas([0.5]), { consequence: "{d.x}" }, 'no column "x"'],
    [
      "a dataset measure that is not there",
      antennas([0.5]),
      { value: "d.flagged / dataset.rows" },
      'no measure "dataset"',
    ],
    [
      "a value of NaN",
      antennas([0.1, Number.NaN, 0.1]),
      {},
      "its value is not known for 1 of 3 rows: antenna 2",
    ],
    ["a null", antennas([null, 0.1]), {}, "its value is not known for 1 of 2 rows: antenna 1"],
    ["words for a value", antennas(["much"]), {}, "its value is not known"],
    [
      "a limit that the plan does not have",
      antennas([0.5]),
      { limits: "{ caution: plan.target_rms, hold: 1 }" },
      "its limits are not known",
    ],
    [
      "limits that come out the same",
      antennas([0.5]),
      { limits: "{ caution: plan.dynamic_range, hold: 1000 }" },
      "come out the same",
    ],
    [
      "a condition on NaN",
      antennas([Number.NaN]),
      { value: "0.1", where: "d.flagged > 0" },
      "its value is not known",
    ],
  ])("says that it could not judge %s", (_, given, changes, why) => {
    const result = judge(ruleSet(rule(changes)), given, PLAN);
    expect(result.notJudged).toEqual([{ rule: "made-up", why: expect.stringContaining(why) as string }]);
    expect(result.findings).toEqual([]);
  });

  it("still judges the rows that have a value", () => {
    const result = judged([Number.NaN, 0.9]);
    expect(result.findings).toHaveLength(1);
    expect(result.notJudged).toHaveLength(1);
  });

  it("lets a rule ask for what is unknown", () => {
    const unknown = {
      where: "!op.is_finite(d.flagged)",
      value: "1",
      limits: "{ caution: 0, hold: 2 }",
      consequence: "x",
    };
    expect(judged([Number.NaN, 0.9], unknown)).toMatchObject({
      notJudged: [],
      findings: [{ severity: 0.5 }],
    });
  });

  it.each([
    ["d.flagged > 0 || d.antenna == 1", 1, 0],
    ["d.flagged > 0 && d.antenna == 2", 0, 0],
    ["d.flagged > 0 && d.antenna == 1", 0, 1],
    ["!(d.flagged > 0)", 0, 1],
    ["d.flagged == 1 || dataset.rows > 3", 0, 1],
    ["op.is_nan(d.flagged)", 1, 0],
  ])("takes a condition on what is unknown as neither met nor missed: %s", (where, found, unknown) => {
    const one = rule({ where, value: "1", limits: "{ caution: 0, hold: 2 }", consequence: "x" });
    const dataset = measure("dataset", "dataset", { rows: [Number.NaN] });
    const given = measure("antenna", "antenna", { antenna: [1], flagged: [Number.NaN] });
    const { findings, notJudged } = judge(ruleSet(one), measures(dataset, given), PLAN);
    expect([findings.length, notJudged.length]).toEqual([found, unknown]);
  });

  it("takes a null for what is not there: it meets no condition", () => {
    expect(judged([null], { where: "d.flagged > 0", value: "1", consequence: "x" })).toMatchObject({
      findings: [],
      notJudged: [],
    });
  });

  it("takes an event table without rows for an answer: nothing happened", () => {
    const events = measure("event", "event", { kind: [], size: [] });
    const result = judge(
      ruleSet(rule({ measure: "event", each: "event", value: "d.size" })),
      measures(events),
      PLAN,
    );
    expect(result).toMatchObject({ score: 100, findings: [], notJudged: [] });
  });

  it("judges an infinite value, and NaN never passes for good", () => {
    expect(judged([Number.POSITIVE_INFINITY]).findings[0]).toMatchObject({ severity: 1, verdict: "hold" });
    expect(judged([Number.NEGATIVE_INFINITY]).findings).toEqual([]);
  });

  it("does not read a null as zero", () => {
    expect(judged([null], { value: "1 - d.flagged" }).findings).toEqual([]);
    expect(judged([null], { value: "1 - d.flagged" }).notJudged).toHaveLength(1);
  });

  it("gives the same judgement again", () => {
    expect(JSON.stringify(judged([0.3, 0.5]).findings)).toBe(JSON.stringify(judged([0.3, 0.5]).findings));
  });

  const fractions = fc.array(fc.double({ min: 0, max: 1, noNaN: true }), { minLength: 1, maxLength: 12 });

  it("has a score from 0 to 100 that no worse row can raise", () => {
    const weights = fc.double({ min: 0, max: 1, noNaN: true });
    fc.assert(
      fc.property(
        fractions,
        fc.nat(),
        fc.double({ min: 0, max: 1, noNaN: true }),
        weights,
        (values, at, worse, weight) => {
          const one = rule({ weight: weight.toFixed(6) });
          const before = judge(ruleSet(one), antennas(values), PLAN);
          const i = at % values.length;
          const raised = values.with(i, Math.max(values[i]!, worse));
          const after = judge(ruleSet(one), antennas(raised), PLAN);
          expect(before.score).toBeGreaterThanOrEqual(0);
          expect(before.score).toBeLessThanOrEqual(100);
          expect(after.score).toBeLessThanOrEqual(before.score);
          expect(before.findings.every(({ severity }) => severity > 0 && severity <= 1)).toBe(true);
        },
      ),
      { numRuns: 150 },
    );
  });

  it("does not depend on the order of the rows, but for which of equals comes first", () => {
    fc.assert(
      fc.property(fractions, (values) => {
        const there = judged(values);
        const back = judged([...values].reverse());
        expect(back.score).toBe(there.score);
        expect(back.findings.map(({ measured }) => measured.value)).toEqual(
          there.findings.map(({ measured }) => measured.value),
        );
      }),
      { numRuns: 100 },
    );
  });
});
