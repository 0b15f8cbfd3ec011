import { describe, expect, it } from "vitest";
import { explainRule, explainRules } from "../../src/report/explain.ts";
import { FAMILIES } from "../../src/rules/finding.ts";
import { loadRules } from "../../src/rules/load.ts";
import { InputError } from "../../src/util/errors.ts";
import { rule, ruleSet } from "../rules/support.ts";

const PLAIN = { width: 80, colour: false };
const OURS = await loadRules();

describe("explainRules", () => {
  const text = explainRules(OURS, PLAIN);

  it("fits 80 columns and names every rule with its limits", () => {
    expect(text.split("\n").every((line) => line.length <= 80)).toBe(true);
    for (const { id } of OURS.rules) expect(text).toMatch(new RegExp(`^  ${id}$`, "m"));
    expect(text.replace(/\s+/g, " ").match(/caution (?:above|below|at) .{1,60}?, hold/g)).toHaveLength(
      OURS.rules.length,
    );
  });

  it("lists the families in the order of the reports", () => {
    const heads = [...text.matchAll(/\(([a-z-]+)\)$/gm)].map((match) => match[1]);
    expect(heads).toEqual(FAMILIES.filter((family) => OURS.rules.some((one) => one.family === family)));
  });

  it("says which rules are not ours and which are switched off", () => {
    const set = {
      ...ruleSet({ ...rule(), from: "mine/a.yaml" }),
      off: [{ id: "burst", from: "mine/b.yaml" }],
    };
    expect(explainRules(set, PLAIN)).toContain("made-up (from mine/a.yaml)");
    expect(explainRules(set, PLAIN)).toContain("- burst, by mine/b.yaml");
  });
});

describe("explainRule", () => {
  it.each(OURS.rules.map(({ id }) => id))("shows %s in full within 80 columns", (id) => {
    const text = explainRule(OURS, id, PLAIN);
    expect(text.split("\n").every((line) => line.length <= 80)).toBe(true);
    for (const label of [
      "Question",
      "Measure",
      "Value",
      "Limits",
      "Weight",
      "Consequence",
      "Suggests",
      "Sources",
    ]) {
      expect(text).toContain(`  ${label} `);
    }
  });

  it("shows a limit that is computed as it is written, and which way is worse", () => {
    const computed = rule({ limits: "{ caution: 1 / plan.dynamic_range, hold: 0.6 }" });
    expect(explainRule(ruleSet(computed), "made-up", PLAIN)).toContain(
      "caution at 1 / plan.dynamic_range, hold at 60 %",
    );
    const falling = rule({ limits: "{ caution: 0.6, hold: -0.2 }", unit: "m" });
    expect(explainRule(ruleSet(falling), "made-up", PLAIN)).toContain(
      "caution below 60 cm, hold below -20 cm",
    );
  });

  it("gives the nearest id to a misspelt one, and says when a rule is switched off", () => {
    const lineOf = (id: string, set = OURS) => {
      try {
        return explainRule(set, id, PLAIN);
      } catch (error) {
        return error instanceof InputError ? error.line : String(error);
      }
    };
    expect(lineOf("time-smering")).toBe('there is no rule "time-smering". Did you mean "time-smearing"?');
    expect(lineOf("nonsense")).toContain("visvet explain lists the rules");
    expect(lineOf("burst", { rules: [], off: [{ id: "burst", from: "b.yaml" }] })).toContain(
      "is switched off",
    );
  });

  it("lets no stranger's text command the terminal", () => {
    const hostile = { ...rule(), title: "a\u001b[31mred\u202e", from: "x\u0007y" };
    for (const text of [
      explainRule(ruleSet(hostile), "made-up", PLAIN),
      explainRules(ruleSet(hostile), PLAIN),
    ]) {
      expect(text.replaceAll("\n", "")).not.toMatch(/[\p{Cc}\p{Cf}]/u);
    }
  });
});
