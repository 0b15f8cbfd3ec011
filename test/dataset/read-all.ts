/** Every row and sample of a dataset in one set of arrays, for tests that compare. */
import type { BlockRequest, Dataset, SampleBlock } from "../../src/dataset/dataset.ts";

export interface AllRows {
  readonly blocks: readonly { readonly firstRow: number; readonly rows: number }[];
  readonly time: number[];
  readonly u: number[];
  readonly v: number[];
  readonly w: number[];
  readonly antenna1: number[];
  readonly antenna2: number[];
  readonly subarray: number[];
  readonly field: number[];
  readonly setup: number[];
  readonly integration: number[];
  readonly real: number[];
  readonly imag: number[];
  readonly weight: number[];
}

const ROW_COLUMNS = [
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
] as const satisfies readonly (keyof SampleBlock)[];
const SAMPLE_COLUMNS = ["real", "imag", "weight"] as const satisfies readonly (keyof SampleBlock)[];

export async function readAll(
  dataset: Dataset,
  request: BlockRequest = { want: "samples" },
): Promise<AllRows> {
  const { subbands, channels, polarizations } = dataset.shape;
  const perRow = subbands * channels * polarizations;
  const all: Record<string, number[]> = {};
  for (const name of [...ROW_COLUMNS, ...SAMPLE_COLUMNS]) all[name] = [];
  const blocks: { firstRow: number; rows: number }[] = [];
  for await (const block of dataset.blocks(request)) {
    blocks.push({ firstRow: block.firstRow, rows: block.rows });
    for (const name of ROW_COLUMNS) all[name]!.push(...block[name].subarray(0, block.rows));
    for (const name of SAMPLE_COLUMNS) all[name]!.push(...block[name].subarray(0, block.rows * perRow));
  }
  return { blocks, ...all } as unknown as AllRows;
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
