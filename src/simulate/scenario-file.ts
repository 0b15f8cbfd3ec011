/** A scenario from its YAML file, with the line and column of what is wrong. */
import { type Path, YamlDocument } from "../rules/yaml-document.ts";
import { InputError, type Place } from "../util/errors.ts";
import { readSmallText } from "../util/small-text.ts";
import { checkScenario, type Scenario } from "./scenario.ts";

export interface ScenarioFile {
  readonly scenario: Scenario;
  /** Put the line and column to an error that names a part of the scenario; any other error as it is. */
  located(error: unknown): unknown;
}

/** @throws InputError when the file cannot be read or is not a scenario */
export async function readScenario(path: string): Promise<ScenarioFile> {
  return parseScenario(await readSmallText(path, "scenario"), path);
}

/**
 * @param file name to put in errors
 * @throws InputError with line and column
 */
export function parseScenario(text: string, file: string): ScenarioFile {
  const document = new YamlDocument(text, file);
  const result = checkScenario(document.value);
  if ("issues" in result) {
    const issue = result.issues[0]!;
    const more = result.issues.length - 1;
    const place =
      issue.key === undefined ? document.place(issue.path) : document.keyPlace(issue.path, issue.key);
    const where = issue.path.length === 0 ? "" : `${issue.path.join(".")}: `;
    throw new InputError(
      `${where}${issue.message}`,
      place,
      more === 0 ? undefined : `${more} more ${more === 1 ? "place is" : "places are"} wrong too`,
    );
  }
  return { scenario: result.scenario, located: (error) => located(error, document) };
}

const PART = /^scenario, ([\w.]+)/;

function located(error: unknown, document: YamlDocument): unknown {
  const part = error instanceof InputError ? PART.exec(error.place.part ?? "") : null;
  if (part === null) return error;
  const path: Path = part[1]!.split(".").map((step) => (/^\d+$/.test(step) ? Number(step) : step));
  const { message, advice } = error as InputError;
  const place: Place = document.place(path);
  return new InputError(`${part[1]}: ${message}`, place, advice, { cause: error });
}
