/** The truth about a simulated file, as JSON beside it. */
import type { Selection } from "../dataset/selection.ts";
import { writeTextFile } from "../util/write-file.ts";
import type { Scenario } from "./scenario.ts";
import type { TrueFault, Truth } from "./truth.ts";

/** Selections as flags.json writes them: antenna numbers, MJD (UTC), sub-bands and channels from 0. */
export interface TruthFault extends Omit<TrueFault, "selection">, Selection {
  /** "T1", "T2", ... in the order of the scenario */
  readonly id: string;
  /** samples it touched, and of all the dataset's */
  readonly samples: number;
  readonly fraction: number;
}

export interface TruthFile {
  readonly format: "visvet-truth";
  readonly version: 1;
  /** name of the dataset */
  readonly dataset: string;
  readonly seed: number;
  readonly rows: number;
  readonly samples: number;
  readonly faults: readonly TruthFault[];
}

/** @param name of the dataset's file, without folder and suffix */
export async function truthFile(truth: Truth, scenario: Scenario, name: string): Promise<TruthFile> {
  const counts = await truth.counts();
  const samples = truth.rows * truth.observation.rowSamples;
  return {
    format: "visvet-truth",
    version: 1,
    dataset: name,
    seed: scenario.seed,
    rows: truth.rows,
    samples,
    faults: truth.faults.map(({ selection, ...fault }, i) => ({
      id: `T${i + 1}`,
      ...fault,
      ...selection,
      samples: counts[i]!,
      fraction: counts[i]! / samples,
    })),
  };
}

/** @throws InputError when it cannot be written */
export async function writeTruth(file: TruthFile, path: string): Promise<void> {
  await writeTextFile(path, `${JSON.stringify(file, null, 2)}\n`);
}
