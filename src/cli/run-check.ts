/** The work behind `visvet check`, apart from its options so that `--help` need not load it. */
import { basename, dirname, join } from "node:path";
import chalk from "chalk";
import { fieldNamed, fieldView } from "../dataset/field-view.ts";
import { openDataset } from "../dataset/open.ts";
import { readPlan } from "../dataset/plan-file.ts";
import { checkDataset } from "../report/check.ts";
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

export interface CheckOptions {
  readonly dataset: readonly string[];
  readonly plan: string | undefined;
  readonly out: string | undefined;
  readonly rules: readonly string[] | undefined;
  readonly field: string | undefined;
  /** names of formats, also several joined by commas */
  readonly flagsAs: readonly string[] | undefined;
  readonly tables: TableFormat | undefined;
  readonly strict: boolean;
  readonly quiet: boolean;
}

/** @returns the exit status: 0, or 1 where the worst verdict is a hold (or, when strict, a caution) */
export async function runCheck(options: CheckOptions): Promise<number> {
  const request = options.plan === undefined ? {} : await readPlan(options.plan);
  const rules = await loadRules(options.rules ?? []);
  const flagFormats = flagFormatsOf(options.flagsAs ?? []);
  let status = 0;
  for (const path of options.dataset) {
    const whole = await openDataset(path);
    const dataset =
      options.field === undefined ? whole : await fieldView(whole, fieldNamed(whole, options.field).id);
    const progress = createProgress(process.stderr);
    const check = await checkDataset(dataset, { plan: request, rules, onStage: progress.stage }).finally(
      progress.end,
    );
    const folder = outputFolder(options, dataset.name);
    const written = await writeReports(check, folder);
    const flags = await writeFlags(check, folder, flagFormats);
    written.push(...flags.paths);
    if (options.tables !== undefined) written.push(await tablesLine(check, folder, options.tables));
    process.stdout.write(options.quiet ? oneLine(check) : fullText(check, written));
    for (const sentence of flags.refused) process.stdout.write(`${plainText(sentence)}\n`);
    status = Math.max(status, statusOf(check, options.strict));
  }
  return status;
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

function outputFolder(options: CheckOptions, name: string): string {
  if (options.out === undefined) return `visvet-${name}`;
  return options.dataset.length === 1 ? options.out : join(options.out, name);
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
