/** The measures that rules may name, and their columns: what the author of a rule needs. */
import { KNOWN_MEASURES } from "../rules/catalogue.ts";
import { InputError, nearest } from "../util/errors.ts";
import type { ExplainOptions } from "./explain.ts";
import { Paper } from "./text/paper.ts";

/** Every measure with its title. */
export function explainMeasures(options: ExplainOptions): string {
  const paper = new Paper(options);
  paper.prose("Measures that rules may name. visvet explain --measure NAME shows the columns of one.", 0);
  paper.gap();
  const labelWidth = widest(KNOWN_MEASURES.keys());
  for (const [name, { title }] of KNOWN_MEASURES) paper.entry(name, title, { labelWidth });
  return paper.text;
}

/**
 * The columns of one measure, with units and meanings.
 *
 * @throws InputError with the nearest name when there is none of this one
 */
export function explainMeasure(name: string, options: ExplainOptions): string {
  const measure = KNOWN_MEASURES.get(name);
  if (measure === undefined) {
    const near = nearest(name, KNOWN_MEASURES.keys());
    const advice = near === undefined ? "visvet explain --measure lists them" : `Did you mean "${near}"?`;
    throw new InputError(`there is no measure "${name}"`, {}, advice);
  }
  const paper = new Paper(options);
  paper.prose(name, 0, paper.ink.heading);
  paper.prose(measure.title, 0, paper.ink.strong);
  paper.gap();
  const labelWidth = widest(measure.columns.map((column) => column.name));
  for (const column of measure.columns) {
    const unit = column.unit === "" ? "" : ` (${column.unit})`;
    paper.entry(column.name, `${column.meaning}${unit}`, { labelWidth });
  }
  return paper.text;
}

/** Room for the longest of the names and a gap after it. */
function widest(names: Iterable<string>): number {
  return 2 + Math.max(...[...names].map((name) => name.length));
}
