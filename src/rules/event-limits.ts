/** The measure of events with the dynamic range that each of them allows, from the measure of limits. */
import type { Measure, Measures } from "../measure/table.ts";

const EVENT = "event";
const LIMIT = "limit";

/** Columns that the measure "event" gains. */
export const EVENT_LIMIT_COLUMNS = [
  {
    name: "dynamic_range",
    unit: "",
    meaning: "peak over rms that this event alone allows; NaN where it was not ranked",
  },
  {
    name: "dynamic_range_ratio",
    unit: "ratio",
    meaning: "planned dynamic range over the one that this event alone allows",
  },
] as const;

/** The measures as they are where either of the two is missing. */
export function withEventLimits(measures: Measures): Measures {
  const events = measures.get(EVENT);
  const limits = measures.get(LIMIT);
  if (events === undefined || limits === undefined) return measures;
  if (events.table.columnNames().includes(EVENT_LIMIT_COLUMNS[0].name)) return measures;
  const range = new Array<number>(events.table.numRows()).fill(Number.NaN);
  const ratio = [...range];
  for (let row = 0; row < limits.table.numRows(); row++) {
    const event: unknown = limits.table.get("event", row);
    if (typeof event !== "number" || !(event >= 0 && event < range.length)) continue;
    range[event] = Number(limits.table.get("dynamic_range", row));
    ratio[event] = Number(limits.table.get("ratio", row));
  }
  const joined: Measure = {
    ...events,
    columns: [...events.columns, ...EVENT_LIMIT_COLUMNS],
    table: events.table.assign({ dynamic_range: range, dynamic_range_ratio: ratio }),
  };
  return new Map([...measures, [EVENT, joined]]);
}
