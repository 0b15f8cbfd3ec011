/** Tiles of a second pass in a thread of its own, some at a time: the thread keeps what it needs for the next ones. */
import { type DatasetRecipe, reopen } from "../../dataset/recipe.ts";
import type { Survey } from "../../measure/survey-result.ts";
import type { Answer, Report } from "../../util/workers.ts";
import type { Choice } from "./choice.ts";
import { TileAnalysis } from "./tile-analysis.ts";
import type { TileResult } from "./tile-result.ts";

/** What all tiles of a pass have in common. */
export interface PassSetup {
  readonly recipe: DatasetRecipe;
  readonly survey: Omit<Survey, "dataset" | "measures" | "screen">;
  readonly choice: Omit<Choice, "looks">;
}

export interface TileTask {
  /** null: that of the task before */
  readonly setup: PassSetup | null;
  readonly tiles: readonly { readonly number: number; readonly look: Uint8Array | null }[];
}

interface Pass {
  readonly analysis: TileAnalysis;
  /** by tile, only of those at hand */
  readonly looks: (Uint8Array | null)[];
}

let pass: Pass | undefined;

/** A task without tiles is the last of its pass. */
export async function run({ setup, tiles }: TileTask, report: Report): Promise<Answer<TileResult[]>> {
  if (setup !== null) pass = await begin(setup);
  const results: TileResult[] = [];
  for (const { number, look } of tiles) {
    pass!.looks[number] = look;
    results.push(await pass!.analysis.tile(number));
    delete pass!.looks[number];
    report(results.length);
  }
  if (tiles.length === 0) pass = undefined;
  return { result: results, transfer: results.flatMap(buffersOf) };
}

async function begin({ recipe, survey, choice }: PassSetup): Promise<Pass> {
  const dataset = await reopen(recipe);
  const looks: (Uint8Array | null)[] = [];
  const whole: Survey = { ...survey, dataset, measures: new Map() };
  return { analysis: new TileAnalysis(whole, { ...choice, looks }), looks };
}

function buffersOf({ cells, marks, scores, sampled, kurtosis, means }: TileResult): ArrayBuffer[] {
  const arrays = [
    cells,
    ...Object.values(marks ?? {}),
    ...[scores, sampled].flatMap((sums) => (sums === null ? [] : [sums.sums, sums.counts])),
    ...Object.values(kurtosis),
    ...Object.values(means),
  ] as { readonly buffer: ArrayBuffer }[];
  return [...new Set(arrays.map(({ buffer }) => buffer))];
}
