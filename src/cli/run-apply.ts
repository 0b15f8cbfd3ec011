/** The work behind `visvet apply`, apart from its options so that `--help` need not load it. */
import chalk from "chalk";
import { openDataset } from "../dataset/open.ts";
import { chooseFlags } from "../flags/accepted.ts";
import { applyFlags, countFlags } from "../flags/apply/apply.ts";
import type { FlagPlace } from "../flags/apply/copy-files.ts";
import { readFlags } from "../flags/read-flags.ts";
import { createProgress } from "../report/progress.ts";
import { appliedText } from "../report/text/applied.ts";
import { InputError } from "../util/errors.ts";
import { leftOver } from "../util/new-output.ts";

export interface ApplyOptions {
  readonly dataset: string;
  readonly flags: string;
  readonly out: string | undefined;
  readonly dryRun: boolean;
  readonly only: readonly string[] | undefined;
  readonly except: readonly string[] | undefined;
  readonly into: FlagPlace | undefined;
  readonly columnMap: string | undefined;
}

export async function runApply(options: ApplyOptions): Promise<void> {
  const { out, dryRun, into } = options;
  if (out === undefined && !dryRun) {
    throw new InputError("no --out", {}, "Name the copy to write with --out, or look first with --dry-run");
  }
  const read = await readFlags(options.flags);
  const only = options.only === undefined ? null : ids(options.only);
  const { chosen, skipped } = chooseFlags(read.flags, only, ids(options.except ?? []));
  const dataset = await openDataset(options.dataset, { columnMap: options.columnMap });
  const progress = createProgress(process.stderr);
  const work = async () => {
    if (dryRun || out === undefined) return { applied: null, counts: await countFlags(dataset, chosen) };
    const named = [options.dataset];
    const applied = await applyFlags({ dataset, flags: chosen, out, into, named, onStage: progress.stage });
    return { applied, counts: applied.counts };
  };
  const { applied, counts } = await work().finally(progress.end);
  const text = appliedText(
    {
      dataset,
      flags: chosen,
      skipped,
      counts,
      applied,
      suggestedFor: read.dataset,
      leftOver: out === undefined ? [] : await leftOver(out),
    },
    { width: process.stdout.columns ?? 80, colour: chalk.level > 0 },
  );
  process.stdout.write(text);
}

/** `F1,F3` and `F1 F3` alike. */
function ids(words: readonly string[]): string[] {
  return words.flatMap((word) => word.split(",")).filter((id) => id !== "");
}
