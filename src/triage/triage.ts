/** Triage of a bad image: what is wrong with it, what is behind that, and what would cure it. */
import type { Dataset } from "../dataset/dataset.ts";
import type { FlagEntry } from "../flags/entry.ts";
import { checkDataset } from "../report/check.ts";
import type { CheckRequest } from "../report/look.ts";
import type { Check } from "../report/report.ts";
import { type ScopeWords, scopeWords } from "../report/scope.ts";
import { triageBlindSpots } from "./blind-spots.ts";
import type { TriageCause } from "./causes/cause.ts";
import { finishedCauses } from "./causes/finish.ts";
import { causesOfSymptom } from "./causes/of-symptom.ts";
import type { SkyImage } from "./image/sky-image.ts";
import { type Investigation, investigate } from "./investigate.ts";
import { measureSymptoms } from "./symptoms/measure.ts";
import type { Symptom, SymptomWord } from "./symptoms/symptom.ts";
import { type UvCells, uvCells } from "./uv/cells.ts";

/** What the image itself gave. */
export interface ImageFindings extends Investigation {
  readonly cells: UvCells;
  readonly symptoms: readonly Symptom[];
}

export interface Triage {
  readonly dataset: Dataset;
  readonly check: Check;
  readonly words: ScopeWords;
  /** null where a symptom was described instead */
  readonly image: ImageFindings | null;
  /** null where there is an image */
  readonly symptom: SymptomWord | null;
  /** what accounts for most first */
  readonly causes: readonly TriageCause[];
  /** at fault in the data, though the image hardly shows it */
  readonly minor: readonly TriageCause[];
  /** proposed against the causes; ids are their own */
  readonly flags: readonly FlagEntry[];
  /** one sentence: the outcome */
  readonly statement: string;
  /** what triage could not see, sentences */
  readonly blindSpots: readonly string[];
}

export const CLEAN_STATEMENT = "Nothing in this image is out of family.";

/** @throws InputError where the image is not of the dataset, or either is malformed */
export async function triageImage(dataset: Dataset, image: SkyImage, request: CheckRequest): Promise<Triage> {
  const check = await checkDataset(dataset, request);
  const words = scopeWords(dataset);
  const investigation = await investigate(check.survey, image, (share) =>
    request.onStage?.("Looking at the image", share),
  );
  const cells = uvCells(investigation.seen);
  const symptoms = measureSymptoms(investigation.seen, cells);
  const { causes, minor, flags } = await finishedCauses(investigation, check, words);
  return {
    dataset,
    check,
    words,
    image: { ...investigation, cells, symptoms },
    symptom: null,
    causes,
    minor,
    flags,
    statement: statementOf(causes, symptoms, investigation),
    blindSpots: [...triageBlindSpots(investigation), ...check.blindSpots],
  };
}

function statementOf(
  causes: readonly TriageCause[],
  symptoms: readonly Symptom[],
  { seen }: Investigation,
): string {
  const [first, ...others] = causes;
  if (first !== undefined) {
    const more = others.length === 0 ? "" : ` and ${others.length} more`;
    return `${first.title}${first.where === "" ? "" : ` (${first.where})`}${more}.`;
  }
  if (!seen.held) {
    return "The data do not hold the sources of this image, so no cause can be told from them.";
  }
  const present = symptoms.filter((symptom) => symptom.present).map(({ word }) => word);
  if (present.length === 0) return CLEAN_STATEMENT;
  return `The image shows ${present.join(", ")}, and nothing in the data accounts for it.`;
}

/** What the data say where there is only a described symptom. */
export async function triageSymptom(
  dataset: Dataset,
  symptom: SymptomWord,
  request: CheckRequest,
): Promise<Triage> {
  const check = await checkDataset(dataset, request);
  const words = scopeWords(dataset);
  const { causes, flags } = causesOfSymptom(symptom, check, words);
  const [first] = causes;
  return {
    dataset,
    check,
    words,
    image: null,
    symptom,
    causes,
    minor: [],
    flags,
    statement:
      first === undefined
        ? `The data show no cause of ${symptom}.`
        : `Of what makes ${symptom}, the data show ${causes.length === 1 ? "one cause" : `${causes.length} causes`}; first: ${first.title}.`,
    blindSpots: [
      "Without an image nothing is measured of the symptom: causes are ranked by how far they go in the data alone.",
      ...check.blindSpots,
    ],
  };
}
