/** From rows past a rule's limits to a finding in words. */
import type { Plan } from "../imaging/plan.ts";
import type { Column, Measure, Measures } from "../measure/table.ts";
import { formatNumber } from "../util/units.ts";
import type { Expression } from "./expression.ts";
import type { Finding } from "./finding.ts";
import type { FilledHit, Hit } from "./hit.ts";
import { isPlanKey, type PlanKeyName, planWords } from "./plan-values.ts";
import { formatQuantity } from "./quantity.ts";
import type { Rule } from "./rule.ts";
import { type AntennaLabel, findingScope, measuredLabels, scopeWords, unionScope } from "./scope.ts";
import { verdictOf } from "./severity.ts";
import { fillTemplate, templateExpressions } from "./template.ts";

/** How many rows a finding about many names as evidence. */
const MOST_NAMED = 5;

/**
 * @param hits the rows it speaks of, one or more; the worst of them gives its value, limits and consequence
 * @param judged how many rows the rule looked at
 */
export function findingOf(
  rule: Rule,
  hits: readonly FilledHit[],
  judged: number,
  plan: Plan,
  measures: Measures,
): Finding {
  const ordered = [...hits].sort(bySeverity);
  const { hit, values } = ordered[0]!;
  const scope = unionScope(hits.map((one) => one.hit.scope));
  const label = measuredLabels(measures);
  const show = (value: number) => formatQuantity(value, rule.unit);
  const consequence = fillTemplate(rule.consequence, {
    bare: {
      value: show(hit.value),
      caution: show(hit.caution),
      hold: show(hit.hold),
      scope: scopeWords(scope, label),
      count: String(hits.length),
    },
    value: hit.value,
    valueUnit: rule.unit,
    values,
    unitOf: (source, name) => unitOf(source === "d" ? hit.measure : measures.get("dataset"), name),
  });
  return {
    rule: rule.id,
    family: rule.family,
    verdict: verdictOf(hit.severity),
    severity: hit.severity,
    title: rule.title,
    scope: findingScope(scope),
    measured: { value: hit.value, unit: rule.unit },
    limits: { caution: hit.caution, hold: hit.hold, unit: rule.unit, from: limitsFrom(rule, plan) },
    mendedByFlags: false,
    consequence,
    evidence: evidenceOf(rule, ordered, judged, show, label),
    suggests: rule.suggests,
    flags: [],
  };
}

/** The worst first: by severity, then by how far past the hold limit, then by row. */
function bySeverity(a: FilledHit, b: FilledHit): number {
  const beyond = ({ hit }: FilledHit) => (hit.hold > hit.caution ? hit.value : -hit.value);
  const [past, other] = [beyond(a), beyond(b)];
  if (a.hit.severity === b.hit.severity && past !== other) return past > other ? -1 : 1;
  return b.hit.severity - a.hit.severity || a.hit.row - b.hit.row;
}

function unitOf(measure: Measure | undefined, name: string): string {
  return measure?.columns.find((column) => column.name === name)?.unit ?? "";
}

/** Which plan values set the limits, else the source that does. */
function limitsFrom(rule: Rule, plan: Plan): string {
  const expressions: Expression[] = [
    rule.limits.caution,
    rule.limits.hold,
    rule.value,
    ...templateExpressions(rule.consequence),
    ...(rule.where === null ? [] : [rule.where]),
  ];
  const keys = new Set<PlanKeyName>();
  for (const { source, name } of expressions.flatMap((expression) => expression.names)) {
    if (source === "plan" && isPlanKey(name)) keys.add(name);
  }
  return [...[...keys].map((key) => planWords(plan, key)), rule.sources[0]!].join("; ");
}

/** What the measure says itself where it has words; and of several rows, which and how far. */
function evidenceOf(
  rule: Rule,
  ordered: readonly FilledHit[],
  judged: number,
  show: (value: number) => string,
  label: AntennaLabel,
): string[] {
  const { hit } = ordered[0]!;
  const told = ordered.slice(0, MOST_NAMED).flatMap((one) => toldBy(one.hit));
  const what = meaningOf(rule, hit.measure);
  if (ordered.length === 1) {
    const whom = rowWords(hit, label);
    return told.length > 0 ? told : [`${what}: ${show(hit.value)}${whom === null ? "" : ` for ${whom}`}.`];
  }
  const column = columnOf(rule, hit.measure);
  // Yes is no quantity.
  const plain = column !== undefined && isYesOrNo(column);
  const named = ordered.slice(0, MOST_NAMED).map((one) => {
    const words = rowWords(one.hit, label) ?? `row ${one.hit.row + 1}`;
    return plain ? words : `${words} (${show(one.hit.value)})`;
  });
  const more = ordered.length > MOST_NAMED ? `, and ${ordered.length - MOST_NAMED} more` : "";
  return [
    `${ordered.length} of ${judged} are past the caution limit.`,
    `${what}, worst first: ${named.join("; ")}${more}.`,
    ...told,
  ];
}

function toldBy({ measure, row }: Hit): string[] {
  if (!measure.table.columnNames().includes("evidence")) return [];
  const text: unknown = measure.table.get("evidence", row);
  return typeof text === "string" && text !== "" ? [text] : [];
}

/** Whom a row is about; null when it is the dataset as a whole. */
function rowWords({ measure, row, scope }: Hit, label: AntennaLabel): string | null {
  if (Object.values(scope).some((part) => part !== null)) return scopeWords(scope, label);
  const names = measure.table.columnNames();
  if (measure.each === "gap" && names.includes("from_wavelengths") && names.includes("to_wavelengths")) {
    const at = (name: string) => formatNumber(Number(measure.table.get(name, row)));
    return `spacings of ${at("from_wavelengths")} to ${at("to_wavelengths")} wavelengths`;
  }
  return null;
}

/** What the value is: the meaning of its column, or the rule's title where it is computed or the column says little. */
function meaningOf(rule: Rule, measure: Measure): string {
  const column = columnOf(rule, measure);
  const says = column !== undefined && !isYesOrNo(column) && !/^(?:of|the same)\b/.test(column.meaning);
  const words = says ? column.meaning : rule.title;
  // A letter that is a symbol, as in "u, v, w", stays as it is.
  return /^[a-z]{2}/.test(words) ? words.charAt(0).toUpperCase() + words.slice(1) : words;
}

/** The column that a rule's value is, alone. */
function columnOf({ value: { root } }: Rule, measure: Measure): Column | undefined {
  return root.kind === "name" ? measure.columns.find(({ name }) => name === root.name) : undefined;
}

function isYesOrNo({ meaning }: Column): boolean {
  return meaning.startsWith("1 when");
}
