/** The work behind `visvet check`, apart from its options so that `--help` need not load it. */
import { join } from "node:path";
import chalk from "chalk";
import { fieldView } from "../dataset/field-view.ts";
import { openDataset } from "../dataset/open.ts";
import { readPlan } from "../dataset/plan-file.ts";
import { checkDataset } from "../report/check.ts";
import { createProgress } from "../report/progress.ts";
import type { Check } from "../report/report.ts";
import { writeText } from "../report/text.ts";
import { writeReports } from "../report/write-reports.ts";
import { loadRules } from "../rules/load.ts";
import { plainText } from "../util/terminal.ts";

export interface CheckOptions {
  readonly dataset: readonly string[];
  readonly plan: string | undefined;
  readonly out: string | undefined;
  readonly rules: readonly string[] | undefined;
  readonly field: number | undefined;
  readonly strict: boolean;
  readonly quiet: boolean;
}

/** @returns the exit status: 0, or 1 where the worst verdict is a hold (or, when strict, a caution) */
export async function runCheck(options: CheckOptions): Promise<number> {
  const request = options.plan === undefined ? {} : await readPlan(options.plan);
  const rules = await loadRules(options.rules ?? []);
  let status = 0;
  for (const path of options.dataset) {
    const whole = await openDataset(path);
    const dataset = options.field === undefined ? whole : await fieldView(whole, options.field);
    const progress = createProgress(process.stderr);
    const check = await checkDataset(dataset, { plan: request, rules, onStage: progress.stage }).finally(
      progress.end,
    );
    const folder = outputFolder(options, dataset.name);
    const written = await writeReports(check, folder);
    process.stdout.write(options.quiet ? oneLine(check) : fullText(check, written));
    status = Math.max(status, statusOf(check, options.strict));
  }
  return status;
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
