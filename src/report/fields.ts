/**
 * Each field of a dataset judged on its own data, against an image of it. The views of the fields share the rows out
 * between them, so that all of them together cost about as much as the look at the whole.
 */
import type { Dataset, Field } from "../dataset/dataset.ts";
import { fieldView } from "../dataset/field-view.ts";
import { flaggedView } from "../dataset/flagged-view.ts";
import type { FlagEntry } from "../flags/entry.ts";
import { reconcile } from "../flags/reconcile.ts";
import { forecastAfter } from "../imaging/forecast.ts";
import type { ImageForecast } from "../imaging/image.ts";
import type { Plan } from "../imaging/plan.ts";
import { fieldWeights } from "../imaging/sampling.ts";
import type { Survey } from "../measure/survey-result.ts";
import type { Finding, Verdict } from "../rules/finding.ts";
import { type CheckRequest, look } from "./look.ts";

/** What a field's own data say. */
export interface FieldCheck {
  readonly field: Field;
  readonly rows: number;
  /** of the usable weight of the dataset */
  readonly weightFraction: number;
  /** derived from the field's own data */
  readonly plan: Plan;
  readonly score: number;
  readonly scoreAfterFlags: number;
  readonly verdict: Verdict;
  /** worst first, as with the dataset's */
  readonly findings: readonly Finding[];
  readonly image: ImageForecast;
}

export interface FieldLeft {
  readonly id: number;
  readonly name: string;
  /** it has usable samples, and others have more */
  readonly usable: boolean;
  readonly why: string;
}

export interface FieldChecks {
  /** in the order of the dataset's fields */
  readonly judged: readonly FieldCheck[];
  /** with rows, and not judged: too little of the weight, or nothing usable */
  readonly left: readonly FieldLeft[];
  /** the one that the rest of the report forecasts an image of: the heaviest */
  readonly main: number;
}

/** Fields that are judged on their own; of more, the heaviest. */
export const MOST_FIELDS = 12;

/**
 * @param survey of the whole dataset
 * @param flags  suggested for the whole dataset
 * @returns null where there is one field alone
 */
export async function judgeFields(
  dataset: Dataset,
  survey: Survey,
  flags: readonly FlagEntry[],
  request: CheckRequest,
): Promise<FieldChecks | null> {
  const weights = fieldWeights(survey);
  const present = dataset.fields.filter(({ id }) => weights.has(id));
  if (present.length < 2) return null;
  const weightOf = ({ id }: Field) => weights.get(id) ?? 0;
  const heaviest = [...present].sort((a, b) => weightOf(b) - weightOf(a));
  const chosen = new Set(heaviest.filter((field) => weightOf(field) > 0).slice(0, MOST_FIELDS));
  const total = present.reduce((sum, field) => sum + weightOf(field), 0);
  const judged: FieldCheck[] = [];
  for (const field of present) {
    if (!chosen.has(field)) continue;
    judged.push(await judgeField(dataset, survey, field, weightOf(field) / total, flags, request));
  }
  const left = present
    .filter((field) => !chosen.has(field))
    .map((field) => ({
      id: field.id,
      name: field.name,
      usable: weightOf(field) > 0,
      why: weightOf(field) > 0 ? `not one of the ${MOST_FIELDS} heaviest` : "it has no usable samples",
    }));
  return { judged, left, main: heaviest[0]!.id };
}

async function judgeField(
  dataset: Dataset,
  survey: Survey,
  field: Field,
  weightFraction: number,
  flags: readonly FlagEntry[],
  request: CheckRequest,
): Promise<FieldCheck> {
  const view = withOwnSubarrays(await fieldView(dataset, field.id), survey);
  const own = flags.filter(({ fields }) => fields === null || fields.includes(field.id));
  const named = `, field ${field.id}`;
  const first = await look(view, request, null, named);
  const { plan, judged } = first;
  const second =
    own.length === 0 ? first : await look(flaggedView(view, own), request, plan, `${named}, flags applied`);
  const { findings, verdict } = reconcile(judged, second.judged, own);
  return {
    field,
    rows: view.rows,
    weightFraction,
    plan,
    score: judged.score,
    scoreAfterFlags: second.judged.score,
    verdict,
    findings,
    image:
      second === first ? first.forecast.image : forecastAfter(first.forecast.image, second.forecast.image),
  };
}

/**
 * Antennas that were in another sub-array all the time are not missing from this field: they are left out of its array.
 *
 * @param survey of the whole dataset
 */
function withOwnSubarrays(view: Dataset, { tracks, baselines }: Survey): Dataset {
  const ownField = view.fields[0]!.id;
  const own = new Set<number>();
  for (let cell = 0; cell < tracks.cells; cell++) {
    if (tracks.field[cell] === ownField) own.add(tracks.subarray[cell]!);
  }
  const inOwn = new Set<number>();
  const elsewhere = new Set<number>();
  for (let b = 0; b < baselines.length; b++) {
    const { antenna1, antenna2 } = baselines[b]!;
    let before = Number.NaN;
    for (let cell = tracks.firstCell[b]!; cell < tracks.firstCell[b + 1]!; cell++) {
      if (tracks.subarray[cell] === before) continue;
      before = tracks.subarray[cell]!;
      (own.has(before) ? inOwn : elsewhere).add(antenna1).add(antenna2);
    }
  }
  const antennas = view.array.antennas.filter(({ number }) => inOwn.has(number) || !elsewhere.has(number));
  if (antennas.length === view.array.antennas.length) return view;
  // Another thread would open it with all antennas, and settle on other sizes: this one reads it alone.
  const { recipe: _, ...rest } = view;
  return { ...rest, array: { ...view.array, antennas } };
}
