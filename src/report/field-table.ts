/** The fields side by side, as every report shows them. */
import { plainText } from "../util/terminal.ts";
import { formatFlux, formatPercent } from "../util/units.ts";
import type { FieldCheck, FieldChecks } from "./fields.ts";
import { MOST_FIELDS } from "./fields.ts";
import { formatArcsec, formatRatio } from "./quantity.ts";
import { type DataTable, numbers, words } from "./tables.ts";
import { scoreText, VERDICT_NAME } from "./words.ts";

export function fieldTable({ judged }: FieldChecks): DataTable {
  return {
    caption: "Each field judged on its own data",
    columns: [
      words("Field"),
      words("Verdict"),
      numbers("Score"),
      numbers("With flags"),
      numbers("Weight"),
      words("Beam"),
      numbers("Noise"),
      numbers("Allows"),
      words("Main cause"),
    ],
    rows: judged.map((one) => [
      fieldLabel(one.field),
      VERDICT_NAME[one.verdict],
      scoreText(one.score),
      scoreText(one.scoreAfterFlags),
      formatPercent(one.weightFraction),
      ...imageCells(one),
      mainCause(one),
    ]),
  };
}

function imageCells({ image }: FieldCheck): [beam: string, noise: string, allows: string] {
  const planned = image.weightings.find((result) => result.planned)?.before;
  const [worst] = image.limits;
  const beam =
    planned === undefined || !Number.isFinite(planned.majorArcsec)
      ? "unknown"
      : `${formatArcsec(planned.majorArcsec)} x ${formatArcsec(planned.minorArcsec)}`;
  const noise = planned === undefined ? "unknown" : formatFlux(planned.noiseJy);
  return [beam, noise, worst === undefined ? "no limit" : formatRatio(worst.dynamicRangeFraction)];
}

function mainCause({ findings }: FieldCheck): string {
  const [worst] = findings.filter(({ verdict }) => verdict !== "ready");
  return worst === undefined ? "nothing found" : worst.title;
}

export function fieldLabel({ id, name }: { readonly id: number; readonly name: string }): string {
  const shown = plainText(name).trim();
  return shown === "" ? String(id) : `${id} ${shown}`;
}

/** What to know when reading the table, sentences. */
export function fieldNotes({ judged, left, main }: FieldChecks): string[] {
  const heaviest = judged.find(({ field }) => field.id === main);
  const texts = [
    "Each row is of one field alone, against an image planned from its own data; flags are those suggested for all " +
      "fields together. Allows is the dynamic range, peak over rms, that the worst cause in that field allows.",
  ];
  if (heaviest !== undefined) {
    texts.push(
      `The rest of this report judges all fields together, and the image it forecasts is of field ` +
        `${fieldLabel(heaviest.field)}, which has most of the weight; --field judges another alone.`,
    );
  }
  const unusable = left.filter(({ usable }) => !usable);
  if (unusable.length > 0) texts.push(`No usable sample: field ${listed(unusable)}.`);
  if (left.length > unusable.length) {
    texts.push(
      `Of ${judged.length + left.length} fields the ${MOST_FIELDS} heaviest are judged on their own; ` +
        `${left.length - unusable.length} lighter ones are in the judgement of all together alone.`,
    );
  }
  return texts;
}

function listed(fields: readonly { readonly id: number; readonly name: string }[]): string {
  const more = fields.length > 6 ? ` and ${fields.length - 6} more` : "";
  return `${fields.slice(0, 6).map(fieldLabel).join(", ")}${more}`;
}
