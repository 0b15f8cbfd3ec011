/** plans.yaml: which plan a dataset is judged against, by its file, its field and its frequency. */
import { dirname, isAbsolute, join } from "node:path";
import { z } from "zod";
import type { Dataset } from "../dataset/dataset.ts";
import { globPattern, hasWildcard } from "../dataset/glob.ts";
import { type Path, YamlDocument } from "../rules/yaml-document.ts";
import { InputError, nearest } from "../util/errors.ts";
import { readSmallText } from "../util/small-text.ts";
import { parseFrequency } from "../util/units.ts";

/** One entry: the first whose every condition holds is taken. */
export interface PlanChoice {
  /** pattern for the path below the folder that is searched; null: any */
  readonly files: string | null;
  /** name of a field; null: any */
  readonly field: string | null;
  /** Hz; overlaps with the band; null: any */
  readonly frequency: readonly [number, number] | null;
  /** plan file, as it is opened; null: derive the plan from the data */
  readonly plan: string | null;
  /** the files of one folder that match are one observation */
  readonly together: boolean;
}

const ENTRY = z.strictObject({
  files: z.string().min(1).max(1000).optional(),
  field: z.string().min(1).max(200).optional(),
  frequency: z.string().max(100).optional(),
  plan: z.string().min(1).max(1000).optional(),
  together: z.boolean().optional(),
});
const FORM = z.strictObject({ plans: z.array(ENTRY).max(1000) });

/** @throws InputError at the line and column of what is not right */
export async function readPlanChoices(path: string): Promise<PlanChoice[]> {
  const document = new YamlDocument(await readSmallText(path, "a list of plans"), path);
  const parsed = FORM.safeParse(document.value);
  if (!parsed.success) throw formError(document, parsed.error.issues[0]!);
  return parsed.data.plans.map((entry, i) => ({
    files: entry.files ?? null,
    field: entry.field ?? null,
    frequency: entry.frequency === undefined ? null : frequencies(document, i, entry.frequency),
    plan: entry.plan === undefined ? null : beside(path, entry.plan),
    together: entry.together ?? false,
  }));
}

/** Plans are named as seen from the list. */
function beside(list: string, plan: string): string {
  return isAbsolute(plan) ? plan : join(dirname(list), plan);
}

function frequencies(document: YamlDocument, entry: number, text: string): [number, number] {
  const path: Path = ["plans", entry, "frequency"];
  const place = document.place(path);
  const match = /^\s*(\S.*?)\s*(?:-|\bto\b)\s*(\S.*?)\s*$/.exec(text);
  if (match === null) {
    throw new InputError(
      `"${text}" is no range of frequencies`,
      place,
      "Write two, such as 1.3GHz to 1.5GHz",
    );
  }
  const range: [number, number] = [parseFrequency(match[1]!, place), parseFrequency(match[2]!, place)];
  if (range[0] < range[1]) return range;
  throw new InputError(`"${text}" runs from high to low`, place, "Write the lower frequency first");
}

function formError(document: YamlDocument, issue: z.core.$ZodIssue): InputError {
  const path = issue.path.map((step) => (typeof step === "symbol" ? String(step) : step));
  if (issue.code === "unrecognized_keys") {
    const key = issue.keys[0]!;
    const known = path.length === 0 ? Object.keys(FORM.shape) : Object.keys(ENTRY.shape);
    const near = nearest(key, known);
    const hint = near === undefined ? `: expected one of ${known.join(", ")}` : `: did you mean "${near}"?`;
    return new InputError(`unknown key "${key}"${hint}`, document.keyPlace(path, key));
  }
  return new InputError(
    `${path.length === 0 ? "the list" : path.join(".")}: ${issue.message.charAt(0).toLowerCase()}${issue.message.slice(1)}`,
    document.place(path),
    "Write plans: and below it entries with files, field, frequency and plan",
  );
}

/** Whether a path below the searched folder is one that the entry is for. */
export function matchesPath(choice: PlanChoice, path: string): boolean {
  if (choice.files === null) return true;
  if (!hasWildcard(choice.files)) return choice.files === path;
  const { root, parts } = globPattern(choice.files);
  const before = root === "" ? [] : root.split("/");
  const names = path.split("/");
  return before.every((name, i) => names[i] === name) && matchesParts(parts, names.slice(before.length));
}

function matchesParts(parts: ReturnType<typeof globPattern>["parts"], names: readonly string[]): boolean {
  const [part, ...rest] = parts;
  if (part === undefined) return names.length === 0;
  if (part === "**") {
    return names.some((_, skipped) => matchesParts(rest, names.slice(skipped))) || rest.length === 0;
  }
  return names.length > 0 && part.test.test(names[0]!) && matchesParts(rest, names.slice(1));
}

/** The entry for a dataset; null: none is, and the plan follows from the data. */
export function choosePlan(
  choices: readonly PlanChoice[],
  path: string,
  dataset: Pick<Dataset, "fields" | "setups">,
): PlanChoice | null {
  return (
    choices.find(
      (choice) =>
        matchesPath(choice, path) &&
        (choice.field === null || dataset.fields.some(({ name }) => name.trim() === choice.field)) &&
        (choice.frequency === null || overlaps(choice.frequency, dataset)),
    ) ?? null
  );
}

function overlaps([low, high]: readonly [number, number], { setups }: Pick<Dataset, "setups">): boolean {
  return setups.some(({ frequencies: list }) =>
    list.some((frequency) => frequency >= low && frequency <= high),
  );
}
