/** The plan as it was judged: every value with where it comes from. */
import type { Weighting } from "../dataset/plan-request.ts";
import type { Plan, PlanValue } from "../imaging/plan.ts";
import { formatAngle, formatFlux, formatLength } from "../util/units.ts";
import { formatRatio } from "./quantity.ts";
import { type DataTable, words } from "./tables.ts";

const ORIGIN: Readonly<Record<PlanValue<unknown>["origin"], string>> = {
  given: "given",
  file: "from the file",
  derived: "derived",
  default: "default",
};

export function weightingName(weighting: Weighting): string {
  return weighting.kind === "robust" ? `robust(${weighting.robust})` : weighting.kind;
}

export function planTable(plan: Plan): DataTable {
  const row = <T>(name: string, item: PlanValue<T>, text: (value: T) => string) => [
    name,
    text(item.value),
    originText(item),
  ];
  const orNone = (text: (value: number) => string) => (value: number | null) =>
    value === null ? "none" : text(value);
  return {
    caption: "The plan that the dataset was judged against",
    columns: [words("Plan"), words("Value"), words("Where it comes from")],
    rows: [
      row("field of view", plan.fieldOfView, formatAngle),
      row("resolution", plan.resolution, formatAngle),
      row("largest scale", plan.largestScale, formatAngle),
      row("target rms", plan.targetRms, orNone(formatFlux)),
      row("dynamic range", plan.dynamicRange, formatRatio),
      row("dish diameter", plan.dishDiameter, orNone(formatLength)),
      row("weighting", plan.weighting, weightingName),
      row("imager corrects w", plan.correctsW, (value) => (value ? "yes" : "no")),
      row("purpose", plan.purpose, (value) => value),
      row("line channels", plan.lineChannels, lineText),
      row("expected SEFD", plan.expectedSefd, orNone(formatFlux)),
    ],
  };
}

/** `given in the plan`, `derived: 1.0 lambda/B of ...`: the origin is not said twice. */
function originText({ origin, how }: PlanValue<unknown>): string {
  const word = ORIGIN[origin];
  return how === "" ? word : how.startsWith(word) ? how : `${word}: ${how}`;
}

function lineText(ranges: Plan["lineChannels"]["value"]): string {
  if (ranges.length === 0) return "none";
  return ranges.map(({ subband, channels }) => `${subband}:${channels[0]}-${channels[1]}`).join(", ");
}
