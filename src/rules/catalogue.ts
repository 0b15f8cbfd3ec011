/** Every measure that rules may name, with its columns: a misspelt one is found when the rule is loaded. */
import { EVENT_FORM, INTERFERENCE_FORM } from "../detect/event-table.ts";
import { IMAGING_MEASURES } from "../imaging/measure-columns.ts";
import * as survey from "../measure/forms.ts";
import type { Column } from "../measure/table.ts";
import { InputError, nearest } from "../util/errors.ts";
import { EVENT_LIMIT_COLUMNS } from "./event-limits.ts";
import type { Expression, Source } from "./expression.ts";
import type { Rule } from "./rule.ts";
import { templateExpressions } from "./template.ts";
import type { Path, YamlDocument } from "./yaml-document.ts";

/** What a rule's author may count on, whatever the dataset. */
export interface KnownMeasure {
  readonly title: string;
  readonly columns: readonly Column[];
}

/** By name. */
export const KNOWN_MEASURES: ReadonlyMap<string, KnownMeasure> = new Map<string, KnownMeasure>([
  ...[...Object.values(survey), ...IMAGING_MEASURES].map((form): [string, KnownMeasure] => [form.name, form]),
  [
    "event",
    { title: "What happened to some of the samples", columns: [...EVENT_FORM, ...EVENT_LIMIT_COLUMNS] },
  ],
  ["interference", { title: "Interference as a whole, one row", columns: INTERFERENCE_FORM }],
]);

const CATALOGUE: ReadonlyMap<string, ReadonlySet<string>> = new Map(
  [...KNOWN_MEASURES].map(([name, { columns }]) => [name, new Set(columns.map((column) => column.name))]),
);

/** @throws InputError at the line and column of a measure or column that there is none of */
export function requireKnownNames(rule: Rule, document: YamlDocument): void {
  if (!CATALOGUE.has(rule.measure)) {
    const found = `there is no measure "${rule.measure}"${spelling(rule.measure, CATALOGUE.keys())}`;
    throw new InputError(found, document.place(["measure"]));
  }
  for (const [path, expression] of expressionsOf(rule)) {
    for (const { source, name, at } of expression.names) {
      const measure = measureOf(rule, source);
      const columns = measure === null ? undefined : CATALOGUE.get(measure);
      if (columns === undefined || columns.has(name)) continue;
      const found = `the measure "${measure}" has no column "${name}"${spelling(name, columns)}`;
      throw new InputError(found, { ...document.characterPlace(path, at), part: path.join(".") });
    }
  }
}

function measureOf(rule: Rule, source: Source): string | null {
  return source === "d" ? rule.measure : source === "dataset" ? "dataset" : null;
}

function* expressionsOf(rule: Rule): Iterable<[Path, Expression]> {
  if (rule.where !== null) yield [["where"], rule.where];
  yield [["value"], rule.value];
  yield [["limits", "caution"], rule.limits.caution];
  yield [["limits", "hold"], rule.limits.hold];
  for (const expression of templateExpressions(rule.consequence)) yield [["consequence"], expression];
}

function spelling(word: string, known: Iterable<string>): string {
  const list = [...known];
  const near = nearest(word, list);
  if (near !== undefined) return `: did you mean "${near}"?`;
  return list.length > 40 ? "" : `: expected one of ${list.join(", ")}`;
}
