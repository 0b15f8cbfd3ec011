/** Every row and sample of a dataset in plain arrays, for tests that compare, and the error that a promise ends in. */
import type { BlockRequest, Dataset } from "../../src/dataset/dataset.ts";
import { readAll as readBlock } from "../support/read-all.ts";

const COLUMNS = [
  "time",
  "u",
  "v",
  "w",
  "antenna1",
  "antenna2",
  "subarray",
  "field",
  "setup",
  "integration",
  "real",
  "imag",
  "weight",
] as const;

export type AllRows = Record<(typeof COLUMNS)[number], number[]>;

export async function readAll(
  dataset: Dataset,
  request: BlockRequest = { want: "samples" },
): Promise<AllRows> {
  const block = await readBlock(dataset, request);
  return Object.fromEntries(COLUMNS.map((name) => [name, [...block[name]]])) as AllRows;
}

/** The InputError that `promise` ends in, as the line a user sees; fails when there is none. */
export async function lineOfError(promise: Promise<unknown>): Promise<string> {
  try {
    await promise;
  } catch (error) {
    if (error instanceof Error && "line" in error && typeof error.line === "string") return error.line;
    throw error;
  }
  throw new Error("expected an InputError, nothing was thrown");
}
