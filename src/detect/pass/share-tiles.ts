/** The tiles of a second pass shared out among threads; their results come in the order of the tiles all the same. */
import type { Survey } from "../../measure/survey-result.ts";
import { sharedArray } from "../../util/shared-array.ts";
import { moduleBeside, type Workers } from "../../util/workers.ts";
import type { Choice } from "./choice.ts";
import type { TileResult } from "./tile-result.ts";
import type { PassSetup, TileTask } from "./tile-task.ts";

/** Tiles that a thread does before their results are added up: results waiting take memory, and turns take time. */
const TILES_A_TURN = 4;

/**
 * @param numbers of the tiles, ascending
 * @throws InputError where the dataset turns out to be malformed
 */
export async function* sharedTiles(
  survey: Survey,
  choice: Choice,
  numbers: readonly number[],
  workers: Workers,
): AsyncGenerator<TileResult> {
  const module = moduleBeside("./tile-task", import.meta.url);
  const turn = workers.jobs * TILES_A_TURN;
  let setup: PassSetup | null = setupOf(survey, choice);
  for (let from = 0; from < numbers.length; from += turn) {
    const tiles = numbers.slice(from, from + turn).map((number) => ({ number, look: choice.looks[number]! }));
    const tasks = Array.from({ length: workers.jobs }, (_, job): TileTask => {
      return { setup, tiles: tiles.filter((_, i) => i % workers.jobs === job) };
    });
    // A thread without a tile is done: what it kept for the pass goes.
    const results = await workers.run<TileTask, TileResult[]>(module, tasks);
    for (let i = 0; i < tiles.length; i++) yield results[i % workers.jobs]![Math.floor(i / workers.jobs)]!;
    setup = null;
  }
  await workers.run<TileTask, TileResult[]>(
    module,
    Array.from({ length: workers.jobs }, () => ({ setup: null, tiles: [] })),
  );
}

function setupOf({ dataset, measures, screen, ...survey }: Survey, choice: Choice): PassSetup {
  const { cut, isWhole, leftOut } = choice;
  // Of the levels tiles ask the noise alone.
  const sigma = sharedArray(survey.levels.sigma);
  const levels = { median: new Float32Array(0), sigma, count: new Uint32Array(0) };
  return {
    recipe: dataset.recipe!,
    survey: { ...survey, levels },
    choice: { cut, isWhole, leftOut },
  };
}
