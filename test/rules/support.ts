/** Plans, measures and rules made by hand. */
import { table } from "arquero";
import type { Plan, PlanValue } from "../../src/imaging/plan.ts";
import type { Measure, Measures, RowKind } from "../../src/measure/table.ts";
import type { Rule, RuleSet } from "../../src/rules/rule.ts";
import { readRule } from "../../src/rules/schema.ts";
import { YamlDocument } from "../../src/rules/yaml-document.ts";

function derived<T>(value: T): PlanValue<T> {
  return { value, origin: "derived", how: "made up" };
}

export const PLAN: Plan = {
  fieldOfView: { value: 0.01, origin: "given", how: "given" },
  resolution: derived(1e-5),
  largestScale: derived(1e-3),
  targetRms: derived(null),
  dynamicRange: { value: 1000, origin: "given", how: "given" },
  dishDiameter: derived(25),
  weighting: derived({ kind: "natural" } as const),
  correctsW: { value: false, origin: "default", how: "the default" },
  purpose: derived("continuum" as const),
  lineChannels: derived([]),
  expectedSefd: derived(null),
};

export function measure(
  name: string,
  each: RowKind,
  columns: Readonly<Record<string, readonly unknown[]>>,
  units: Readonly<Record<string, string>> = {},
): Measure {
  return {
    name,
    each,
    title: name,
    columns: Object.keys(columns).map((column) => ({
      name: column,
      unit: units[column] ?? "",
      meaning: `${column.replaceAll("_", " ")}`,
    })),
    table: table(Object.fromEntries(Object.entries(columns).map(([key, values]) => [key, [...values]]))),
  };
}

export function measures(...list: readonly Measure[]): Measures {
  return new Map(list.map((one) => [one.name, one]));
}

const BASE = {
  id: "made-up",
  family: "flagged-fraction",
  title: "A made-up rule",
  question: "Is it so?",
  measure: "antenna",
  each: "antenna",
  value: "d.flagged",
  unit: "fraction",
  limits: "{ caution: 0.2, hold: 0.6 }",
  weight: "0.5",
  consequence: "The noise rises by {1 / op.sqrt(1 - value) - 1 as fraction}.",
  suggests: "none",
  sources: '["common practice, no source"]',
} satisfies Record<string, string>;

/** The text of a rule file; a key of null is left out. */
export function ruleText(changes: Readonly<Record<string, string | null>> = {}): string {
  const keys: Record<string, string | null> = { ...BASE, ...changes };
  return Object.entries(keys)
    .filter(([, value]) => value !== null)
    .map(([key, value]) => `${key}: ${quoted(key, value!)}\n`)
    .join("");
}

function quoted(key: string, value: string): string {
  return key === "consequence" || key === "where" || key === "value" ? JSON.stringify(value) : value;
}

/** A rule over made-up measures: its columns are not held against those that are known. */
export function rule(changes: Readonly<Record<string, string | null>> = {}): Rule {
  const read = readRule(new YamlDocument(ruleText(changes), "made-up.yaml"), "made-up.yaml");
  if (!("rule" in read)) throw new Error("switched off");
  return read.rule;
}

export function ruleSet(...rules: readonly Rule[]): RuleSet {
  return { rules, off: [] };
}
