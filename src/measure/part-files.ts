/**
 * A survey in shares, each made by a process of its own and kept in a file: which rows are whose, whether all shares are
 * there, and the survey that they come to.
 */
import { resolve } from "node:path";
import type { Dataset } from "../dataset/dataset.ts";
import { fingerprintOf } from "../dataset/fingerprint.ts";
import { InputError } from "../util/errors.ts";
import type { Workers } from "../util/workers.ts";
import { surveyMemory } from "./memory.ts";
import type { PartIdentity } from "./state/identity.ts";
import { readPart, readPartIdentity, writePart } from "./state/part-file.ts";
import { surveyShared } from "./survey.ts";
import { SurveyPart } from "./survey-part.ts";

/** A share that is asked for. */
export interface PartRequest {
  /** from 0, below `of` */
  readonly index: number;
  readonly of: number;
  /** what the user named */
  readonly named: readonly string[];
  readonly columnMap: string | null;
  /** Field.id of the only field of the dataset; null: all */
  readonly field: number | null;
  /** bytes that the whole program may take */
  readonly memory: number;
  readonly tool: string;
}

/** Shares that a dataset may be cut into. */
export const MOST_PARTS = 100_000;

/** What the part of a request is of. @throws InputError when the index is out of range */
export async function identityOf(dataset: Dataset, request: PartRequest): Promise<PartIdentity> {
  const { index, of, named, columnMap, field, memory, tool } = request;
  const { name, bytes, rows, shape } = dataset;
  return {
    tool,
    index,
    of,
    firstRow: firstRowOf(rows, index, of),
    endRow: firstRowOf(rows, index + 1, of),
    memory,
    field,
    dataset: {
      fingerprint: await fingerprintOf(dataset),
      name,
      named: named.map((path) => resolve(path)),
      columnMap: columnMap === null ? null : resolve(columnMap),
      bytes,
      rows,
      ...shape,
    },
  };
}

/** Of `of` shares of nearly equal length, the first row of one; of the one after the last, the number of rows. */
function firstRowOf(rows: number, index: number, of: number): number {
  // rows x index may be beyond 2^53.
  return Number((BigInt(rows) * BigInt(index)) / BigInt(of));
}

/** Whether the file holds just this part, whole: then it need not be made again. */
export async function isMade(path: string, identity: PartIdentity, dataset: Dataset): Promise<boolean> {
  try {
    const made = await readPart(path);
    if (differences(made.identity, identity).length > 0 || made.identity.index !== identity.index)
      return false;
    SurveyPart.from(made.state, dataset, surveyMemory(identity.memory));
    return true;
  } catch (error) {
    // Absent, cut or damaged: to be made.
    if (error instanceof InputError) return false;
    throw error;
  }
}

/** Survey the rows of a part and write it. @throws InputError where the dataset is malformed, or the file cannot be written */
export async function makePart(
  dataset: Dataset,
  identity: PartIdentity,
  path: string,
  options: {
    readonly workers?: Workers | undefined;
    readonly onProgress?: (rowsDone: number, rows: number) => void;
  } = {},
): Promise<void> {
  const { firstRow, endRow, memory } = identity;
  const part = await surveyShared(dataset, {
    ...options,
    rows: [firstRow, endRow],
    memory: surveyMemory(memory),
  });
  await writePart(path, identity, part.state());
}

/** Parts that belong together, all there. */
export interface PartSet {
  /** by index */
  readonly paths: readonly string[];
  /** of the first */
  readonly identity: PartIdentity;
}

/** @throws InputError when parts are missing, are there twice, or are of different datasets or settings */
export async function gatherParts(paths: readonly string[]): Promise<PartSet> {
  const found = new Map<number, string>();
  let first: { readonly path: string; readonly identity: PartIdentity } | undefined;
  for (const path of paths) {
    const identity = await readPartIdentity(path);
    first ??= { path, identity };
    const [other] = differences(identity, first.identity);
    if (other !== undefined) {
      throw new InputError(
        `its ${other.what} is ${other.ours}, and that of ${first.path} is ${other.theirs}`,
        { file: path },
        "Join the parts of one dataset, made with the same options",
      );
    }
    const twin = found.get(identity.index);
    if (twin !== undefined) {
      throw new InputError(
        `this is part ${identity.index}, and so is ${twin}`,
        { file: path },
        "Name each part once",
      );
    }
    found.set(identity.index, path);
  }
  if (first === undefined)
    throw new InputError("no part is named", {}, "Name the files that visvet part wrote");
  const { of } = first.identity;
  const missing = Array.from({ length: of }, (_, i) => i).filter((i) => !found.has(i));
  if (missing.length > 0) {
    throw new InputError(
      `of ${of} parts, numbered from 0, these are missing: ${listOf(missing)}`,
      {},
      `Make them: visvet part … --index ${missing[0]} --of ${of}`,
    );
  }
  return { paths: Array.from({ length: of }, (_, i) => found.get(i)!), identity: first.identity };
}

/** `0-3, 7, 9-11`, cut where it grows long. */
function listOf(numbers: readonly number[]): string {
  const runs: string[] = [];
  for (let i = 0; i < numbers.length; ) {
    let last = i;
    while (numbers[last + 1] === numbers[last]! + 1) last++;
    runs.push(last === i ? `${numbers[i]}` : `${numbers[i]}-${numbers[last]}`);
    i = last + 1;
  }
  return runs.length > 12 ? `${runs.slice(0, 12).join(", ")} and more` : runs.join(", ");
}

/**
 * The survey that parts come to.
 *
 * @param dataset that they are of, opened
 * @throws InputError where it has changed since, or a part is damaged
 */
export async function joinPartFiles({ paths, identity }: PartSet, dataset: Dataset): Promise<SurveyPart> {
  const { index, of, tool, memory, field } = identity;
  const { named, columnMap } = identity.dataset;
  const now = await identityOf(dataset, { index, of, tool, memory, field, named, columnMap });
  const [other] = differences(now, identity);
  if (other !== undefined) {
    throw new InputError(
      `the dataset's ${other.what} is ${other.ours} now, and was ${other.theirs} when its parts were made`,
      { file: dataset.files[0] ?? dataset.name },
      "Make the parts again, or name the dataset that they are of with --dataset",
    );
  }
  const share = surveyMemory(memory);
  let all: SurveyPart | undefined;
  for (const path of paths) {
    const { identity: own, state } = await readPart(path);
    const firstRow = firstRowOf(dataset.rows, own.index, of);
    if (own.firstRow !== firstRow || own.endRow !== firstRowOf(dataset.rows, own.index + 1, of)) {
      throw state.error(`rows ${own.firstRow} to ${own.endRow} are not those of part ${own.index} of ${of}`);
    }
    const part = SurveyPart.from(state, dataset, share);
    if (all === undefined) all = part;
    else all.merge(part);
  }
  return all!;
}

interface Difference {
  readonly what: string;
  readonly ours: unknown;
  readonly theirs: unknown;
}

/** In what parts differ that belong together; their index, rows and paths apart. */
function differences(ours: PartIdentity, theirs: PartIdentity): Difference[] {
  const pairs: readonly (readonly [string, (of: PartIdentity) => unknown])[] = [
    ["number of parts", ({ of }) => of],
    ["memory", ({ memory }) => `${memory} bytes`],
    ["field", ({ field }) => field ?? "any"],
    ["name", ({ dataset }) => dataset.name],
    ["size", ({ dataset }) => `${dataset.bytes} bytes`],
    ["number of rows", ({ dataset }) => dataset.rows],
    [
      "shape",
      ({ dataset: { subbands, channels, polarizations } }) => `${subbands} x ${channels} x ${polarizations}`,
    ],
    ["content", ({ dataset }) => dataset.fingerprint.slice(0, 12)],
    ["program", ({ tool }) => tool],
  ];
  return pairs.flatMap(([what, of]) =>
    of(ours) === of(theirs) ? [] : [{ what, ours: of(ours), theirs: of(theirs) }],
  );
}
