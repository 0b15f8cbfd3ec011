/** The work behind `visvet join`. */
import { fieldView } from "../dataset/field-view.ts";
import { openDataset } from "../dataset/open.ts";
import { gatherParts, joinPartFiles } from "../measure/part-files.ts";
import { InputError } from "../util/errors.ts";
import { type JudgeOptions, judgeDataset, understand } from "./judge-dataset.ts";
import { memoryOf } from "./take-resources.ts";

export interface JoinOptions extends JudgeOptions {
  readonly parts: readonly string[];
  readonly dataset: readonly string[] | undefined;
  readonly out: string | undefined;
}

/** @returns the exit status, as that of a check */
export async function runJoin(options: JoinOptions): Promise<number> {
  const set = await gatherParts(options.parts);
  const { memory, field, dataset: surveyed } = set.identity;
  if (options.memory !== undefined && memoryOf(options) !== memory) {
    throw new InputError(
      `the parts were made with --memory ${memory}: ${options.memory} would judge them otherwise than one check`,
      { part: "--memory" },
      "Leave it out, or make the parts again",
    );
  }
  const judgement = await understand({ ...options, memory: `${memory}B` }, memory);
  const whole = await openDataset(options.dataset ?? surveyed.named);
  const dataset = field === null ? whole : await fieldView(whole, field);
  const survey = await joinPartFiles(set, dataset);
  return judgeDataset(judgement, dataset, options.out ?? `visvet-${dataset.name}`, survey);
}
