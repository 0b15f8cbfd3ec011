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
    name: "excess",
    unit: "fraction",
    meaning: "rms that it adds to the image, over the thermal noise of the image",
  },
  {
    name: "allowed_size",
    unit: "",
    meaning:
      "|size| that the planned dynamic range allows, in the event's unit; of interference where the brightness is not known, what adds the thermal noise once more",
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
  const names = new Set(events.table.columnNames());
  if (names.has("dynamic_range_ratio")) return measures;
  const read = (name: string, row: number) =>
    names.has(name) ? Number(events.table.get(name, row)) : Number.NaN;
  const { ranges, ratios, thermal } = rangesOf(limits, events.table.numRows());
  const excess = ranges.map((range, row) => {
    const byRange = thermal / range;
    if (!Number.isNaN(byRange) || !INTERFERENCE.has(String(events.table.get("kind", row)))) return byRange;
    // n of N samples, each with s sigmas of any phase: s/sqrt 2 of its real part, s sqrt(n/2N) of the noise of the mean.
    return read("size", row) * Math.sqrt((read("outlying_fraction", row) * read("fraction", row)) / 2);
  });
  const errors = ratios.map((ratio, row) => read("error", row) / ratio);
  const joined: Measure = {
    ...events,
    columns: [...events.columns, ...EVENT_LIMIT_COLUMNS],
    table: events.table.assign({
      dynamic_range: ranges,
      dynamic_range_ratio: ratios,
      excess,
      allowed_size: ratios.map(
        (ratio, row) => Math.abs(read("size", row)) / (Number.isNaN(ratio) ? excess[row]! : ratio),
      ),
      allowed_error: errors,
      allowed_phase_deg: errors.map(phaseOfError),
    }),
  };
  return new Map([...measures, [EVENT, joined]]);
}

/** By event, the dynamic range it allows and the planned one over that; and the one that the thermal noise allows. */
function rangesOf({ table }: Measure, events: number) {
  const ranges = new Array<number>(events).fill(Number.NaN);
  const ratios = [...ranges];
  let thermal = Number.NaN;
  for (let row = 0; row < table.numRows(); row++) {
    const event: unknown = table.get("event", row);
    const range = Number(table.get("dynamic_range", row));
    if (table.get("cause", row) === "thermal-noise") thermal = range;
    if (typeof event !== "number" || !(event >= 0 && event < events)) continue;
    ranges[event] = range;
    ratios[event] = Number(table.get("ratio", row));
  }
  return { ranges, ratios, thermal };
}

/** The phase whose error |exp(i phase) - 1| this is, degrees. */
function phaseOfError(error: number): number {
  return error > 2 ? 360 : (2 * Math.asin(error / 2) * 180) / Math.PI;
}
