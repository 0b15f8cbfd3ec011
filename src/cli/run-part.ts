/** The work behind `visvet part`. */
import { fieldNamed, fieldView } from "../dataset/field-view.ts";
import { openDataset } from "../dataset/open.ts";
import { identityOf, isMade, MOST_PARTS, makePart } from "../measure/part-files.ts";
import { createProgress } from "../report/progress.ts";
import { tool } from "../report/tool.ts";
import { InputError } from "../util/errors.ts";
import { plainText } from "../util/terminal.ts";
import { formatCount } from "../util/units.ts";
import type { ResourceOptions } from "./resources.ts";
import { memoryOf, workersFor } from "./take-resources.ts";

export interface PartOptions extends ResourceOptions {
  readonly dataset: readonly string[];
  readonly index: number;
  readonly of: number;
  readonly out: string;
  readonly field: string | undefined;
  readonly quiet: boolean;
}

export async function runPart(options: PartOptions): Promise<void> {
  requireShare(options);
  const memory = memoryOf(options);
  const whole = await openDataset(options.dataset);
  const field = options.field === undefined ? null : fieldNamed(whole, options.field).id;
  const dataset = field === null ? whole : await fieldView(whole, field);
  const { index, of, out } = options;
  const identity = await identityOf(dataset, {
    index,
    of,
    named: options.dataset,
    columnMap: null,
    field,
    memory,
    tool: `${tool().name} ${tool().version}`,
  });
  const say = (text: string) => {
    if (!options.quiet) process.stdout.write(`${plainText(text)}\n`);
  };
  if (await isMade(out, identity, dataset)) {
    say(`${out}: part ${index} of ${of} is there already`);
    return;
  }
  const { firstRow, endRow } = identity;
  const progress = createProgress(process.stderr);
  const workers = workersFor(options, dataset, 1 / of);
  try {
    await makePart(dataset, identity, out, {
      workers,
      onProgress: (rows, all) => progress.stage("Surveying", rows / Math.max(1, all)),
    });
  } finally {
    progress.end();
    await workers?.close();
  }
  say(`Wrote ${out}: part ${index} of ${of}, ${formatCount(endRow - firstRow)} rows from row ${firstRow} on`);
}

function requireShare({ index, of }: PartOptions): void {
  if (!(Number.isInteger(of) && of >= 1 && of <= MOST_PARTS)) {
    throw new InputError(`${of} is no number of parts: expected a whole number from 1 to ${MOST_PARTS}`, {
      part: "--of",
    });
  }
  if (Number.isInteger(index) && index >= 0 && index < of) return;
  throw new InputError(
    `there is no part ${index} of ${of}: expected 0 to ${of - 1}`,
    { part: "--index" },
    "Parts are numbered from 0",
  );
}
