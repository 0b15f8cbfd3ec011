import { describe, expect, it } from "vitest";
import { flaggedView } from "../../src/dataset/flagged-view.ts";
import { EVERYTHING, type Selection } from "../../src/dataset/selection.ts";
import type { DetectedEvent } from "../../src/detect/event.ts";
import type { FlagEntry } from "../../src/flags/entry.ts";
import { reconcile } from "../../src/flags/reconcile.ts";
import { suggestFlags, withCosts } from "../../src/flags/suggest.ts";
import { judge } from "../../src/rules/judge.ts";
import { measure, measures, PLAN, rule, ruleSet } from "../rules/support.ts";
import { DATASET, TIMES } from "./selections.ts";

function event(flag: Partial<Selection> | null, more: Partial<DetectedEvent> = {}): DetectedEvent {
  return {
    kind: "burst",
    cause: "channels",
    scope: { ...EVERYTHING, ...flag },
    flag: flag === null ? null : { ...EVERYTHING, ...flag },
    size: 12,
    sizeError: 1,
    unit: "sigma",
    significance: 12,
    confidence: 0.95,
    samples: 8,
    outlying: 8,
    evidence: "12 sigma above the level.",
    repair: null,
    ...more,
  };
}

const eventRule = (kind: string) =>
  rule({
    id: kind,
    measure: "event",
    each: "event",
    where: `d.kind == '${kind}'`,
    value: "d.size",
    limits: "{ caution: 5, hold: 10 }",
    consequence: "x",
  });
const BURST = eventRule("burst");
const RULES = ruleSet(BURST);

/** The judgement of events by their sizes, one row an event. */
function judged(events: readonly DetectedEvent[], rules = RULES) {
  const column = <T>(read: (one: DetectedEvent) => T) => events.map(read);
  const table = measure("event", "event", {
    kind: column((one) => one.kind),
    size: column((one) => one.size),
    antenna: column((one) => one.scope.antennas?.[0] ?? null),
    subband: column((one) => one.scope.subbands?.[0] ?? null),
  });
  return judge(rules, measures(table), PLAN);
}

const suggested = (events: readonly DetectedEvent[], rules = RULES) =>
  suggestFlags({ dataset: DATASET, times: TIMES, events, judged: judged(events, rules), rules });

describe("suggestFlags", () => {
  it("suggests nothing, and reads nothing, when nothing is at fault", async () => {
    const dataset = { ...DATASET, blocks: () => Promise.reject(new Error("read")) as never };
    const found = await suggestFlags({ dataset, times: TIMES, events: [], judged: judged([]), rules: RULES });
    expect(found).toEqual({ flags: [], doubts: [] });
  });

  it("counts samples and measures the sensitivity that goes", async () => {
    const { flags } = await suggested([event({ antennas: [1], subbands: [0] })]);
    // Two of three baselines, half of the samples, all weights the same: 64 of 192 samples.
    expect(flags).toHaveLength(1);
    expect(flags[0]).toMatchObject({
      id: "F1",
      rule: "burst",
      samples: 64,
      antennas: [1],
      subbands: [0],
      channels: null,
    });
    expect(flags[0]!.fraction).toBeCloseTo(1 / 3, 12);
    expect(flags[0]!.cost.sensitivityLossFraction).toBeCloseTo(1 - Math.sqrt(2 / 3), 12);
    expect(flags[0]!.cost.beamMajorChangeFraction).toBeNaN();
    expect(flags[0]!.reason).toBe("Antenna N1, sub-band 0: 12 sigma above the level.");
  });

  it("offers the repair beside the flag", async () => {
    const { flags } = await suggested([
      event({ subbands: [0], channels: [[1, 1]] }, { repair: "calibrate after 02:14:30" }),
    ]);
    expect(flags[0]!.reason).toContain("Or, instead of flagging: calibrate after 02:14:30.");
  });

  it("numbers entries by confidence times samples", async () => {
    const { flags } = await suggested([
      event({ subbands: [0], channels: [[0, 0]] }),
      event({ subbands: [1], channels: [[0, 1]] }),
    ]);
    expect(flags.map(({ id, samples }) => [id, samples])).toEqual([
      ["F1", 48],
      ["F2", 24],
    ]);
  });

  it("leaves out what is flagged already and what others take together", async () => {
    const events = [
      event({ channels: [[0, 1]] }),
      event({ channels: [[2, 3]] }, { kind: "dropout" }),
      event({ subbands: [1], time: [TIMES[0]!, TIMES[0]!] }, { kind: "lone-samples" }),
    ];
    const rules = ruleSet(BURST, eventRule("dropout"), eventRule("lone-samples"));
    // The three lie at the hold limit, each worth up to 60 % of the sensitivity.
    expect((await suggested(events, rules)).flags.map((flag) => flag.channels)).toEqual([[[0, 1]], [[2, 3]]]);
    const flagged = flaggedView(DATASET, [events[0]!.flag!]);
    const left = await suggestFlags({
      dataset: flagged,
      times: TIMES,
      events: [events[0]!],
      judged: judged([events[0]!]),
      rules: RULES,
    });
    expect(left.flags).toEqual([]);
  });

  it("offers as a doubt what may be sky, and what costs more than it is worth", async () => {
    const unsure = await suggested([event({ subbands: [1] }, { confidence: 0.4 })]);
    expect(unsure).toMatchObject({
      flags: [],
      doubts: [{ rule: "burst", why: expect.stringContaining("sky") as string }],
    });
    const harmless = await suggested([event({ subbands: [1] }, { size: 4 })]);
    expect(harmless).toMatchObject({
      flags: [],
      doubts: [{ why: expect.stringContaining("within all limits") as string }],
    });
    const dear = await suggested([event({ channels: [[0, 2]] }, { size: 5.1 })]);
    expect(dear).toMatchObject({
      flags: [],
      doubts: [{ why: expect.stringContaining("more sensitivity") as string }],
    });
  });

  it("weighs what a fault adds to the image against the sensitivity that goes", async () => {
    // One channel of eight: 6.5 % of the sensitivity. The thermal noise allows a dynamic range of 1000.
    const weighed = async (dynamicRange: number) => {
      const events = [event({ subbands: [0], channels: [[0, 0]] }, { kind: "dropout", size: 1 })];
      const rules = ruleSet(
        rule({ id: "dropout", measure: "event", each: "event", value: "0", consequence: "x" }),
      );
      const table = measure("event", "event", { kind: ["dropout"], size: [1], error: [Number.NaN] });
      const limits = measure("limit", "event", {
        cause: ["dropout", "thermal-noise"],
        event: [0, Number.NaN],
        dynamic_range: [dynamicRange, 1000],
        ratio: [100 / dynamicRange, 0.1],
      });
      const found = judge(rules, measures(table, limits), PLAN);
      return suggestFlags({ dataset: DATASET, times: TIMES, events, judged: found, rules });
    };
    // sqrt(1 + 0.5^2) = 1.118 of the thermal noise goes; sqrt(1 + 0.2^2) = 1.020 would not pay.
    expect((await weighed(2000)).flags).toHaveLength(1);
    expect((await weighed(5000)).flags).toHaveLength(0);
    expect((await weighed(5000)).doubts).toHaveLength(1);
  });

  it("takes the other stretches of an event's cure with it", async () => {
    const other = { ...EVERYTHING, antennas: [1], time: [TIMES[2]!, TIMES[2]!] } as const;
    const { flags } = await suggested([
      event({ antennas: [1], time: [TIMES[0]!, TIMES[0]!] }, { alsoFlag: [other] }),
    ]);
    expect(flags.map(({ time }) => time)).toEqual([
      [TIMES[0], TIMES[0]],
      [TIMES[2], TIMES[2]],
    ]);
  });

  it("suggests nothing for an event that flagging does not cure, or whose rule is switched off", async () => {
    expect((await suggested([event(null)])).flags).toEqual([]);
    expect((await suggested([event({ subbands: [1] })], ruleSet())).flags).toEqual([]);
  });

  it("takes the scope of what a rule finds when the rule suggests a flag", async () => {
    const noisy = rule({
      id: "noisy-antenna",
      value: "d.noise",
      limits: "{ caution: 2, hold: 4 }",
      suggests: "flag",
      consequence: "x",
    });
    const antennas = measure("antenna", "antenna", { antenna: [1, 2, 3], noise: [1, 9, 1] });
    const rules = ruleSet(noisy);
    const found = judge(rules, measures(antennas), PLAN);
    const { flags } = await suggestFlags({
      dataset: DATASET,
      times: TIMES,
      events: [],
      judged: found,
      rules,
    });
    expect(flags).toMatchObject([{ rule: "noisy-antenna", antennas: [2], samples: 128, confidence: 0.9 }]);
  });

  it("gives the same entries whatever the block size", async () => {
    const events = [
      event({ antennas: [2], channels: [[1, 2]] }),
      event({ subbands: [0], channels: [[3, 3]] }),
    ];
    const once = await suggested(events);
    const small = {
      ...DATASET,
      blocks: (request: Parameters<typeof DATASET.blocks>[0]) => DATASET.blocks({ ...request, blockRows: 1 }),
    };
    const again = await suggestFlags({
      dataset: small,
      times: TIMES,
      events,
      judged: judged(events),
      rules: RULES,
    });
    expect(again).toEqual(once);
  });

  it("takes over what the image loses", async () => {
    const { flags } = await suggested([event({ subbands: [0], channels: [[1, 1]] })]);
    const cost = {
      beamMajorChangeFraction: 0.01,
      beamMinorChangeFraction: 0,
      peakSidelobeChangeFraction: -0.1,
      largestGapChangeFraction: 0,
    };
    expect(withCosts(flags, [cost])[0]!.cost).toEqual({ ...flags[0]!.cost, ...cost });
  });
});

describe("reconcile", () => {
  const entry: FlagEntry = {
    ...EVERYTHING,
    id: "F1",
    rule: "burst",
    reason: "x",
    samples: 1,
    fraction: 0.1,
    confidence: 1,
    cost: {
      sensitivityLossFraction: 0,
      beamMajorChangeFraction: 0,
      beamMinorChangeFraction: 0,
      peakSidelobeChangeFraction: 0,
      largestGapChangeFraction: 0,
    },
  };
  const events = [
    event({ antennas: [1], subbands: [0] }),
    event({ antennas: [2], subbands: [1] }, { size: 7 }),
  ];
  const before = judged(events);

  it("softens to a caution the hold that flags bring back, and links the flags", async () => {
    const { flags } = await suggested(events);
    const { findings, verdict } = reconcile(before, judged([]), flags);
    expect(
      findings.map(({ scope, verdict, mendedByFlags, flags }) => [
        scope.antennas,
        verdict,
        mendedByFlags,
        flags,
      ]),
    ).toEqual([
      [[1], "caution", true, ["F1"]],
      [[2], "caution", true, []],
    ]);
    expect(findings[0]!.severity).toBe(1);
    expect(verdict).toBe("caution");
  });

  it("links a finding that others' flags mend to those, and one that they hardly touch to none", () => {
    const share = rule({
      id: "interference-share",
      measure: "interference",
      each: "dataset",
      value: "d.share",
      limits: "{ caution: 0.1, hold: 0.5 }",
      consequence: "x",
    });
    const of = (value: number) =>
      judge(ruleSet(share), measures(measure("interference", "dataset", { share: [value] })), PLAN);
    const flag = (id: string, by: string) => ({ ...entry, id, rule: by });
    const flags = [flag("F1", "burst"), flag("F2", "phase-jump")];
    expect(reconcile(of(0.3), of(0), flags).findings[0]).toMatchObject({
      mendedByFlags: true,
      flags: ["F1"],
    });
    expect(reconcile(of(0.3), of(0.29), flags).findings[0]).toMatchObject({
      mendedByFlags: false,
      flags: [],
    });
  });

  it("leaves a hold that the second judgement still finds", async () => {
    const { flags } = await suggested(events);
    const { findings, verdict } = reconcile(before, judged([events[0]!]), flags);
    expect(findings[0]).toMatchObject({ verdict: "hold", mendedByFlags: false, scope: { antennas: [1] } });
    expect(verdict).toBe("hold");
  });

  it("mends nothing without flags", () => {
    expect(reconcile(before, before, [])).toEqual({ findings: before.findings, verdict: "hold" });
  });

  it("takes samples that the flags drop for mended, but not those that merely cannot be judged any more", () => {
    const rules = ruleSet(rule({ limits: "{ caution: 0.2, hold: 0.4 }" }));
    const antennas = (flagged: readonly number[]) =>
      judge(rules, measures(measure("antenna", "antenna", { antenna: [1, 2], flagged })), PLAN);
    const bad = antennas([0.9, 0.9]);
    const flag = {
      ...entry,
      antennas: [1],
      id: "F1",
      rule: "made-up",
    };
    const { findings } = reconcile(bad, antennas([Number.NaN, Number.NaN]), [flag]);
    const of = (antenna: number) => findings.find(({ scope }) => scope.antennas?.[0] === antenna);
    expect(of(1)).toMatchObject({ verdict: "caution", mendedByFlags: true, flags: ["F1"] });
    expect(of(2)).toMatchObject({ verdict: "hold", mendedByFlags: false, flags: [] });
    expect(findings[0]!.verdict).toBe("hold");
  });

  it("holds when the score after flags is below 50", () => {
    const after = { ...before, score: 49, hits: [] };
    const { flags } = { flags: [] };
    expect(reconcile(judged([]), after, flags).verdict).toBe("hold");
  });
});
