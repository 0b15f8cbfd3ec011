/** From a scenario file to a file of visibilities and the truth beside it. */
import { stat } from "node:fs/promises";
import { basename } from "node:path";
import { InputError } from "../util/errors.ts";
import { formatOf, type WriteOptions, withoutSuffix } from "./file-formats.ts";
import { readScenario } from "./scenario-file.ts";
import { simulate } from "./simulate.ts";
import { truthFile, writeTruth } from "./truth-file.ts";

export interface SimulatedFile {
  readonly path: string;
  readonly truthPath: string;
  readonly rows: number;
  readonly samples: number;
  readonly bytes: number;
  /** of the faults in the scenario */
  readonly faults: number;
}

/** Where the truth about a file stands: night.uvfits has night.truth.json. */
export function truthPathOf(path: string): string {
  return `${withoutSuffix(path)}.truth.json`;
}

/**
 * The format is that of the suffix.
 *
 * @throws InputError when the scenario is none, or a file to write is there already or cannot be written
 */
export async function simulateFile(
  scenarioPath: string,
  path: string,
  options: WriteOptions = {},
): Promise<SimulatedFile> {
  const { scenario, located } = await readScenario(scenarioPath);
  const truthPath = truthPathOf(path);
  for (const file of options.overwrite === true ? [] : [path, truthPath]) await refuseExisting(file);
  let simulated: ReturnType<typeof simulate>;
  try {
    simulated = simulate(scenario);
  } catch (error) {
    throw located(error);
  }
  const { dataset, truth } = simulated;
  const history = [`simulated: ${scenario.name}, seed ${scenario.seed}; invented, no real observation`];
  await formatOf(path).write(dataset, path, { history, ...options });
  const facts = await truthFile(truth, scenario, basename(withoutSuffix(path)));
  await writeTruth(facts, truthPath);
  const { size } = await stat(path);
  return {
    path,
    truthPath,
    rows: facts.rows,
    samples: facts.samples,
    bytes: size,
    faults: facts.faults.length,
  };
}

async function refuseExisting(path: string): Promise<void> {
  const there = await stat(path).then(
    () => true,
    () => false,
  );
  if (there) {
    throw new InputError("the file exists already", { file: path }, "Choose another name or move it away");
  }
}
