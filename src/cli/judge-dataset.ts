/** Judge one dataset, write what the user asked for, and say it: what `visvet check` and `visvet join` have in common. */
import { basename, dirname } from "node:path";
import chalk from "chalk";
import type { Dataset } from "../dataset/dataset.ts";
import { readPlan } from "../dataset/plan-file.ts";
import type { SurveyPart } from "../measure/survey-part.ts";
import { checkDataset } from "../report/check.ts";
import type { CheckRequest } from "../report/look.ts";
import { createProgress } from "../report/progress.ts";
import type { Check } from "../report/report.ts";
import { writeText } from "../report/text.ts";
import { FLAG_FORMATS, type FlagFormat, writeFlags } from "../report/write-flags.ts";
import { writeReports } from "../report/write-reports.ts";
import { writeTables } from "../report/write-tables.ts";
import { loadRules } from "../rules/load.ts";
import type { TableFormat } from "../util/column-table.ts";
import { InputError, nearest } from "../util/errors.ts";
import { plainText } from "../util/terminal.ts";
import type { ResourceOptions } from "./resources.ts";
import { workersFor } from "./take-resources.ts";

export interface JudgeOptions extends ResourceOptions {
  readonly plan: string | undefined;
  readonly rules: readonly string[] | undefined;
  /** names of formats, also several joined by commas */
  readonly flagsAs: readonly string[] | undefined;
  readonly tables: TableFormat | undefined;
  readonly strict: boolean;
  readonly quiet: boolean;
}

/** What the user asks, understood; nothing has been read but the plan and the rules. */
export interface Judgement {
  readonly options: JudgeOptions;
  readonly request: CheckRequest;
  readonly flagFormats: readonly FlagFormat[];
}

/** @throws InputError when the plan, a rule or an option makes no sense */
export async function understand(options: JudgeOptions, memory: number): Promise<Judgement> {
  return {
    options,
    request: {
      plan: options.plan === undefined ? {} : await readPlan(options.plan),
      rules: await loadRules(options.rules ?? []),
      memory,
    },
    flagFormats: flagFormatsOf(options.flagsAs ?? []),
  };
}

/**
 * @param surveyed the state of a survey of all the rows, where there is one already
 * @returns the exit status: 0, or 1 where the verdict is a hold (or, when strict, a caution)
 */
export async function judgeDataset(
  { options, request, flagFormats }: Judgement,
  dataset: Dataset,
  folder: string,
  surveyed?: SurveyPart,
): Promise<number> {
  const progress = createProgress(process.stderr);
  const workers = workersFor(options, dataset);
  try {
    const check = await checkDataset(dataset, { ...request, workers, onStage: progress.stage }, surveyed);
    progress.end();
    const written = await writeReports(check, folder);
    const flags = await writeFlags(check, folder, flagFormats);
    written.push(...flags.paths);
    if (options.tables !== undefined) written.push(await tablesLine(check, folder, options.tables));
    process.stdout.write(options.quiet ? oneLine(check) : fullText(check, written));
    for (const sentence of flags.refused) process.stdout.write(`${plainText(sentence)}\n`);
    return statusOf(check, options.strict);
  } finally {
    progress.end();
    await workers?.close();
  }
}

function flagFormatsOf(words: readonly string[]): FlagFormat[] {
  return words
    .flatMap((word) => word.split(","))
    .map((word) => {
      const format = FLAG_FORMATS.find((one) => one === word);
      if (format !== undefined) return format;
      const near = nearest(word, FLAG_FORMATS);
      const advice =
        near === undefined ? `Formats of flags: ${FLAG_FORMATS.join(", ")}` : `Did you mean ${near}?`;
      throw new InputError(`--flags-as ${word}: unknown format`, {}, advice);
    });
}

/** One line for all of them: there are some thirty. */
async function tablesLine(check: Check, folder: string, format: TableFormat): Promise<string> {
  const [about, ...tables] = await writeTables(check, folder, format);
  return `${dirname(about!)}: ${tables.length} tables, their columns described in ${basename(about!)}`;
}

function fullText(check: Check, written: readonly string[]): string {
  const text = writeText(check, { width: process.stdout.columns ?? 80, colour: chalk.level > 0 });
  return `${text}\n${written.map((path) => `Wrote ${plainText(path)}\n`).join("")}`;
}

function oneLine(check: Check): string {
  const score = `score ${Math.round(check.before.score)}, ${Math.round(check.after.score)} after the suggested flags`;
  return `${plainText(check.dataset.name)}: ${check.verdict} (${score})\n`;
}

function statusOf(check: Check, strict: boolean): number {
  if (check.verdict === "hold") return 1;
  return strict && check.verdict === "caution" ? 1 : 0;
}
