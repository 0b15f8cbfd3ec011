/** The work behind `visvet check`, apart from its options so that `--help` need not load it. */
import { join } from "node:path";
import { fieldNamed, fieldView } from "../dataset/field-view.ts";
import { openDataset } from "../dataset/open.ts";
import { type JudgeOptions, judgeDataset, understand } from "./judge-dataset.ts";
import { memoryOf } from "./take-resources.ts";

export interface CheckOptions extends JudgeOptions {
  readonly dataset: readonly string[];
  readonly out: string | undefined;
  readonly field: string | undefined;
  /** path of a column map */
  readonly columns?: string | undefined;
}

/** @returns the exit status: 0, or 1 where the worst verdict is a hold (or, when strict, a caution) */
export async function runCheck(options: CheckOptions): Promise<number> {
  const judgement = await understand(options, memoryOf(options));
  let status = 0;
  for (const path of options.dataset) {
    const whole = await openDataset(path, { columnMap: options.columns });
    const dataset =
      options.field === undefined ? whole : await fieldView(whole, fieldNamed(whole, options.field).id);
    status = Math.max(status, await judgeDataset(judgement, dataset, outputFolder(options, dataset.name)));
  }
  return status;
}

function outputFolder(options: CheckOptions, name: string): string {
  if (options.out === undefined) return `visvet-${name}`;
  return options.dataset.length === 1 ? options.out : join(options.out, name);
}
