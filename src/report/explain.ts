/** The rules in force as text, or one rule in full. A rule's texts may be a stranger's: they are cleaned on the way. */
import type { Expression } from "../rules/expression.ts";
import { FAMILIES, type Family } from "../rules/finding.ts";
import { formatQuantity } from "../rules/quantity.ts";
import type { Rule, RuleSet } from "../rules/rule.ts";
import { InputError, nearest } from "../util/errors.ts";
import { formatPercent } from "../util/units.ts";
import { Paper } from "./text/paper.ts";

export interface ExplainOptions {
  readonly width: number;
  readonly colour: boolean;
}

/** What each family asks, in the order of the report. */
const FAMILY_TITLES: Readonly<Record<Family, string>> = {
  "flagged-fraction": "Flagged fractions and what they cost",
  amplitude: "Amplitudes: interference, silent and weak antennas, steps, noise",
  bandpass: "Bandpass",
  phase: "Phases: jumps, half turns, delays, noise, closure",
  coverage: "Coverage of the uv plane and the dirty beam",
  "w-term": "The w term",
  smearing: "Smearing",
  geometry: "u, v, w and antenna positions",
  weights: "Weights and noise",
  polarization: "Polarization",
  metadata: "Tables, times and headers",
};

/** Every rule in force: by family, with its limits. */
export function explainRules(set: RuleSet, options: ExplainOptions): string {
  const paper = new Paper(options);
  const count = set.rules.length;
  paper.prose(`${count} rules in force. visvet explain RULE shows one in full.`, 0);
  for (const family of FAMILIES) {
    const rules = set.rules.filter((rule) => rule.family === family);
    if (rules.length === 0) continue;
    paper.heading(`${FAMILY_TITLES[family]} (${family})`);
    for (const rule of rules) {
      paper.prose(rule.from === "ours" ? rule.id : `${rule.id} (from ${rule.from})`, 2, paper.ink.strong);
      paper.prose(rule.title, 4);
      paper.prose(limitsLine(rule), 4, paper.ink.faint);
    }
  }
  if (set.off.length > 0) {
    paper.heading("Switched off");
    for (const { id, from } of set.off) paper.bullet(`${id}, by ${from}`);
  }
  return paper.text;
}

/**
 * One rule in full.
 *
 * @throws InputError with the nearest id when there is none of this one
 */
export function explainRule(set: RuleSet, id: string, options: ExplainOptions): string {
  const rule = set.rules.find((one) => one.id === id);
  if (rule === undefined) throw noRule(set, id);
  const paper = new Paper(options);
  const row = (label: string, text: string) => paper.entry(label, text, { labelWidth: 13 });
  paper.prose(rule.id, 0, paper.ink.heading);
  paper.prose(rule.title, 0, paper.ink.strong);
  paper.gap();
  row("Question", rule.question);
  row("Family", rule.family);
  row("Measure", `${rule.measure}, one finding for each ${rule.each}`);
  if (rule.where !== null) row("Where", rule.where.text);
  row("Value", rule.unit === "" ? rule.value.text : `${rule.value.text} (${rule.unit})`);
  row("Limits", limitsLine(rule));
  row("Weight", `${formatPercent(rule.weight)} of the score at the hold limit`);
  row("Consequence", rule.consequence.text);
  row("Suggests", SUGGESTED[rule.suggests]);
  for (const [i, source] of rule.sources.entries()) row(i === 0 ? "Sources" : "", source);
  row("From", rule.from === "ours" ? "the rules of visvet" : rule.from);
  return paper.text;
}

const SUGGESTED: Readonly<Record<Rule["suggests"], string>> = {
  flag: "flag: drop the samples, where that is worth its cost",
  calibrate: "calibrate: a calibration mends it, flagging only hides it",
  "correct-w": "correct-w: let the imager correct the w term",
  "narrow-field": "narrow-field: plan a smaller field",
  "more-data": "more-data: nothing but more data helps",
  "average-less": "average-less: use data averaged less in time or frequency",
  "fix-metadata": "fix-metadata: mend the tables or headers of the file",
  reweight: "reweight: compute the weights anew from the scatter",
  none: "none: nothing to do, something to know",
};

/** `caution above 20 %, hold above 60 %`; an expression is shown as it is written. */
function limitsLine(rule: Rule): string {
  const { caution, hold } = rule.limits;
  const [low, high] = [numberOf(caution), numberOf(hold)];
  const side = low === null || high === null ? "at" : high >= low ? "above" : "below";
  return `caution ${side} ${shown(caution, rule.unit)}, hold ${side} ${shown(hold, rule.unit)}`;
}

function shown(expression: Expression, unit: string): string {
  const value = numberOf(expression);
  return value === null ? expression.text : formatQuantity(value, unit);
}

/** The number that an expression is, with its sign; null when it computes one. */
function numberOf({ root }: Expression): number | null {
  if (root.kind === "number") return root.value;
  if (root.kind === "unary" && root.operator === "-" && root.operand.kind === "number")
    return -root.operand.value;
  return null;
}

function noRule(set: RuleSet, id: string): InputError {
  const off = set.off.find((one) => one.id === id);
  if (off !== undefined) {
    return new InputError(
      `rule "${id}" is switched off`,
      { file: off.from },
      "Leave that folder out to see it",
    );
  }
  const near = nearest(
    id,
    set.rules.map((rule) => rule.id),
  );
  const advice = near === undefined ? "visvet explain lists the rules" : `Did you mean "${near}"?`;
  return new InputError(`there is no rule "${id}"`, {}, advice);
}
