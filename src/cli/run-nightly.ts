/** The work behind `visvet nightly`, apart from its options so that `--help` need not load it. */
import { spawn } from "node:child_process";
import { stat } from "node:fs/promises";
import { join } from "node:path";
import { INDEX_PAGE, type NightlyResult, runNightly } from "../nightly/nightly.ts";
import { type PlanChoice, readPlanChoices } from "../nightly/plans.ts";
import { parseKeep } from "../nightly/retention.ts";
import { summaryJson, summaryLine, summaryText, worstOf } from "../nightly/summary.ts";
import { createProgress } from "../report/progress.ts";
import { loadRules } from "../rules/load.ts";
import { InputError } from "../util/errors.ts";
import { plainText } from "../util/terminal.ts";
import { parseDuration } from "../util/units.ts";
import type { ResourceOptions } from "./resources.ts";
import { memoryOf, workersFor } from "./take-resources.ts";

export interface NightlyOptions extends ResourceOptions {
  readonly dir: string;
  readonly history: string;
  readonly out: string;
  readonly plans: string | undefined;
  readonly rules: readonly string[] | undefined;
  readonly rest: string;
  readonly wait: string;
  readonly keep: string | undefined;
  readonly prune: boolean;
  readonly onTrouble: string | undefined;
  readonly strict: boolean;
  readonly json: boolean;
  readonly quiet: boolean;
}

/** @returns the exit status: that of the worst dataset of this run */
export async function runNightlyCommand(options: NightlyOptions): Promise<number> {
  const { dir, history, out, keep, prune } = options;
  if (prune && keep === undefined) {
    throw new InputError("--prune needs to know what to keep", {}, "Add --keep, such as --keep 365d");
  }
  const patience = {
    rest: parseDuration(options.rest, { part: "--rest" }),
    wait: parseDuration(options.wait, { part: "--wait" }),
  };
  const kept = keep === undefined ? null : parseKeep(keep);
  const choices = await choicesOf(options);
  const rules = await loadRules(options.rules ?? []);
  const memory = memoryOf(options);
  const progress = createProgress(process.stderr);
  const result = await runNightly({
    folder: dir,
    history,
    out,
    choices,
    rules,
    patience,
    keep: kept,
    prune,
    check: { memory, onStage: progress.stage },
    workersFor: (dataset) => workersFor(options, dataset),
  }).finally(progress.end);
  process.stdout.write(outputOf(options, result, join(out, INDEX_PAGE)));
  if (options.onTrouble !== undefined && worstOf(result.news) !== "ready") {
    await tell(options.onTrouble, summaryText(result));
  }
  return statusOf(result, options.strict);
}

async function choicesOf({ plans, dir }: NightlyOptions): Promise<PlanChoice[]> {
  if (plans !== undefined) return readPlanChoices(plans);
  const usual = join(dir, "plans.yaml");
  return (await stat(usual).catch(() => undefined)) === undefined ? [] : readPlanChoices(usual);
}

function outputOf({ json, quiet, prune }: NightlyOptions, result: NightlyResult, page: string): string {
  if (json) return summaryJson(result);
  if (quiet) return `${summaryLine(result)}\n`;
  return `${summaryText(result)}${beyondText(result, prune)}\nWrote ${plainText(page)}\n`;
}

/** What would go is shown before it goes. */
function beyondText({ beyond }: NightlyResult, pruned: boolean): string {
  if (beyond.length === 0) return "";
  const lines = beyond.slice(0, 20).map(({ night, name }) => `  ${night}  ${plainText(name)}`);
  const more = beyond.length > 20 ? [`  and ${beyond.length - 20} more`] : [];
  const title = pruned
    ? `Deleted, with their reports: ${beyond.length} checks`
    : `Beyond --keep, deleted with their reports when --prune is given: ${beyond.length} checks`;
  return `\n${[title, ...lines, ...more].join("\n")}\n`;
}

function statusOf({ news }: NightlyResult, strict: boolean): number {
  const worst = worstOf(news);
  if (worst === "unreadable") return 2;
  return worst === "hold" || (strict && worst === "caution") ? 1 : 0;
}

/** A command that fails is told of and changes nothing: the verdicts stand. */
async function tell(command: string, summary: string): Promise<void> {
  const failed = await new Promise<string | null>((resolve) => {
    const child = spawn(command, { shell: true, stdio: ["pipe", "inherit", "inherit"] });
    child.on("error", (error) => resolve(error.message));
    child.on("close", (status, signal) => resolve(status === 0 ? null : `it ended with ${signal ?? status}`));
    // A command that does not read its input is no error.
    child.stdin.on("error", () => {});
    child.stdin.end(summary);
  });
  if (failed !== null) process.stderr.write(`${plainText(`--on-trouble ${command}: ${failed}`)}\n`);
}
