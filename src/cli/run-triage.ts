/** The work behind `visvet triage`, apart from its options so that `--help` need not load it. */
import chalk from "chalk";
import type { Dataset } from "../dataset/dataset.ts";
import { fieldNamed, fieldView } from "../dataset/field-view.ts";
import { openDataset } from "../dataset/open.ts";
import { readPlan } from "../dataset/plan-file.ts";
import { createProgress } from "../report/progress.ts";
import { loadRules } from "../rules/load.ts";
import { readSkyImage, type SkyImage } from "../triage/image/sky-image.ts";
import { nearestField } from "../triage/nearest-field.ts";
import { triageText } from "../triage/report/text.ts";
import { writeTriage } from "../triage/report/write.ts";
import { symptomNamed } from "../triage/symptoms/named.ts";
import { type Triage, triageImage, triageSymptom } from "../triage/triage.ts";
import { InputError } from "../util/errors.ts";
import { plainText } from "../util/terminal.ts";

export interface TriageOptions {
  readonly dataset: string;
  readonly image: string | undefined;
  readonly symptom: string | undefined;
  readonly plan: string | undefined;
  readonly out: string | undefined;
  readonly rules: readonly string[] | undefined;
  readonly field: string | undefined;
  readonly quiet: boolean;
}

/** @returns the exit status: 0, whatever is found */
export async function runTriage(options: TriageOptions): Promise<number> {
  const { image: imagePath, symptom } = options;
  if ((imagePath === undefined) === (symptom === undefined)) {
    throw new InputError(
      imagePath === undefined
        ? "neither --image nor --symptom is given"
        : "--image and --symptom are both given",
      {},
      "Give the image, or say with --symptom what it looks like",
    );
  }
  const word = symptom === undefined ? null : symptomNamed(symptom);
  const image = imagePath === undefined ? null : await readSkyImage(imagePath);
  const plan = options.plan === undefined ? {} : await readPlan(options.plan);
  const rules = await loadRules(options.rules ?? []);
  const dataset = await datasetOf(options, image);
  const progress = createProgress(process.stderr);
  const request = { plan, rules, onStage: progress.stage };
  try {
    const triage =
      image === null
        ? await triageSymptom(dataset, word!, request)
        : await triageImage(dataset, image, request);
    progress.end();
    const written = await writeTriage(triage, options.out ?? `visvet-triage-${dataset.name}`);
    process.stdout.write(options.quiet ? oneLine(triage) : fullText(triage, written));
  } finally {
    progress.end();
  }
  return 0;
}

/** The field that is asked for, else the one nearest to the image. */
async function datasetOf({ dataset: path, field }: TriageOptions, image: SkyImage | null): Promise<Dataset> {
  const whole = await openDataset(path);
  if (field !== undefined) return fieldView(whole, fieldNamed(whole, field).id);
  if (image === null || whole.fields.length < 2) return whole;
  return fieldView(whole, nearestField(whole.fields, image.sky));
}

function fullText(triage: Triage, written: readonly string[]): string {
  const text = triageText(triage, { width: process.stdout.columns ?? 80, colour: chalk.level > 0 });
  return `${text}\n${written.map((path) => `Wrote ${plainText(path)}\n`).join("")}`;
}

function oneLine(triage: Triage): string {
  return `${plainText(`${triage.dataset.name}: ${triage.statement}`)}\n`;
}
