import { describe, expect, it } from "vitest";
import { withEventLimits } from "../../src/rules/event-limits.ts";
import { judge } from "../../src/rules/judge.ts";
import { loadRules } from "../../src/rules/load.ts";
import { measure, measures, PLAN } from "./support.ts";

const OURS = await loadRules();

/** A jump, interference of 4 of 100 samples, and what the image allows for the first. */
const EVENTS = measure("event", "event", {
  kind: ["burst", "phase-jump"],
  size: [10, -30],
  error: [Number.NaN, 2 * Math.sin((15 * Math.PI) / 180)],
  outlying: [4, 0],
  outlying_fraction: [0.5, 0],
  fraction: [0.08, 0.5],
  baselines: [10, 6],
  antenna: [null, 7],
});
const LIMITS = measure("limit", "event", {
  cause: ["phase-jump", "thermal-noise"],
  event: [1, Number.NaN],
  dynamic_range: [250, 5000],
  ratio: [4, 0.2],
});

const joined = withEventLimits(measures(EVENTS, LIMITS)).get("event")!;
const column = (name: string) => Array.from(joined.table.array(name) as number[]);

describe("withEventLimits", () => {
  it("gives each event the dynamic range that it alone allows, by its row", () => {
    expect(column("dynamic_range")).toEqual([Number.NaN, 250]);
    expect(column("dynamic_range_ratio")).toEqual([Number.NaN, 4]);
  });

  it("gives the error that the planned dynamic range allows: a fourth of one that allows a fourth of it", () => {
    const error = 2 * Math.sin((15 * Math.PI) / 180);
    expect(column("allowed_error")[1]).toBeCloseTo(error / 4, 12);
    expect(column("allowed_size")[1]).toBeCloseTo(7.5, 12);
    // |exp(i phase) - 1| = error/4.
    const phase = (column("allowed_phase_deg")[1]! * Math.PI) / 180;
    expect(Math.hypot(Math.cos(phase) - 1, Math.sin(phase))).toBeCloseTo(error / 4, 12);
  });

  it("allows interference of unknown effect as much as doubles the noise power", () => {
    // 4 of 100 samples, each off by s in any phase: s sqrt(4/200) = 1.
    expect(column("allowed_size")[0]).toBeCloseTo(Math.sqrt(50), 12);
    expect(column("excess")[0]).toBeCloseTo(10 / Math.sqrt(50), 12);
  });

  it("gives what the thermal noise over the event's share of the rms is", () => {
    expect(column("excess")[1]).toBeCloseTo(5000 / 250, 12);
  });

  it("leaves measures alone that lack one of the two, or have been joined", () => {
    const alone = measures(EVENTS);
    expect(withEventLimits(alone)).toBe(alone);
    const once = withEventLimits(measures(EVENTS, LIMITS));
    expect(withEventLimits(once)).toBe(once);
  });

  it("does not change the measures given", () => {
    expect(EVENTS.table.columnNames()).not.toContain("dynamic_range");
  });
});

describe("the rules on events", () => {
  const { findings } = judge(OURS, measures(EVENTS, LIMITS), PLAN);
  const of = (rule: string) => findings.find((finding) => finding.rule === rule)!;

  it("measure a jump in degrees against the step that the planned dynamic range allows", () => {
    const jump = of("phase-jump");
    expect(jump).toMatchObject({
      verdict: "hold",
      measured: { value: 30, unit: "deg" },
      scope: { antennas: [7] },
    });
    expect(jump.limits.hold).toBeCloseTo(7.42, 2);
    expect(jump.limits.from).toContain("the plan's dynamic range (1000, given)");
    expect(jump.consequence).toMatchObject({ value: 250 });
    expect(jump.consequence.text).toContain(
      "capped at 250, where 1000 is planned: antenna 7 steps by 30 deg on 6 baselines",
    );
  });

  it("measure interference in sigmas", () => {
    expect(of("burst")).toMatchObject({
      verdict: "hold",
      measured: { value: 10, unit: "sigma" },
      consequence: { unit: "fraction" },
    });
    expect(of("burst").limits.caution).toBeCloseTo(0.3 * Math.sqrt(50), 12);
  });
});
