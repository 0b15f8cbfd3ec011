/** The measure of events with the dynamic range that each of them allows, from the measure of limits. */
import { INTERFERENCE_KINDS } from "../detect/event.ts";
import type { Column, Measure, Measures } from "../measure/table.ts";

const EVENT = "event";
const LIMIT = "limit";
const INTERFERENCE: ReadonlySet<string> = INTERFERENCE_KINDS;

/** Columns that the measure "event" gains; NaN where the event was not ranked among the limits. */
export const EVENT_LIMIT_COLUMNS: readonly Column[] = [
  { name: "dynamic_range", unit: "", meaning: "peak over rms that this event alone allows" },
  {
    name: "dynamic_range_ratio",
    unit: "ratio",
    meaning: "planned dynamic range over the one that this event alone allows",
  },
  {
    name: "allowed_size",
    unit: "",
    meaning: "|size| that the planned dynamic range allows, in the event's unit",
  },
  { name: "allowed_error", unit: "fraction", meaning: "error that the planned dynamic range allows" },
  {
    name: "allowed_phase_deg",
    unit: "deg",
    meaning: "phase step that the planned dynamic range allows; 360 where it allows any",
  },
];

/** The measures as they are where either of the two is missing. */
export function withEventLimits(measures: Measures): Measures {
  const events = measures.get(EVENT);
  const limits = measures.get(LIMIT);
  if (events === undefined || limits === undefined) return measures;
  if (events.table.columnNames().includes("dynamic_range_ratio")) return measures;
  const ratios = new Array<number>(events.table.numRows()).fill(Number.NaN);
  const ranges = [...ratios];
  for (let row = 0; row < limits.table.numRows(); row++) {
    const event: unknown = limits.table.get("event", row);
    if (typeof event !== "number" || !(event >= 0 && event < ratios.length)) continue;
    ranges[event] = Number(limits.table.get("dynamic_range", row));
    ratios[event] = Number(limits.table.get("ratio", row));
  }
  const errors = ratios.map((ratio, row) => Number(events.table.get("error", row)) / ratio);
  const joined: Measure = {
    ...events,
    columns: [...events.columns, ...EVENT_LIMIT_COLUMNS],
    table: events.table.assign({
      dynamic_range: ranges,
      dynamic_range_ratio: ratios,
      allowed_size: ratios.map((ratio, row) => allowedSize(events, row, ratio)),
      allowed_error: errors,
      allowed_phase_deg: errors.map(phaseOfError),
    }),
  };
  return new Map([...measures, [EVENT, joined]]);
}

function allowedSize({ table }: Measure, row: number, ratio: number): number {
  const read = (name: string) => Number(table.get(name, row));
  if (!Number.isNaN(ratio) || !INTERFERENCE.has(String(table.get("kind", row))))
    return Math.abs(read("size")) / ratio;
  // n of N samples, each off by s of its noise, add s sqrt(n/N) of the thermal noise to the mean of all.
  return 1 / Math.sqrt(read("outlying_fraction") * read("fraction"));
}

/** The phase whose error |exp(i phase) - 1| this is, degrees. */
function phaseOfError(error: number): number {
  return error > 2 ? 360 : (2 * Math.asin(error / 2) * 180) / Math.PI;
}
