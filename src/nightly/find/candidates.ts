/** The datasets in a folder and those below it: files that hold visibilities, told by their content. */
import { readdir, stat } from "node:fs/promises";
import { join } from "node:path";
import { isBinaryTable, kindOfFile } from "../../dataset/kinds.ts";
import { InputError } from "../../util/errors.ts";
import { matchesPath, type PlanChoice } from "../plans.ts";

export interface Candidate {
  /** below the folder, with /; of several files that of their folder */
  readonly path: string;
  /** as they are opened, in order */
  readonly files: readonly string[];
}

/** Hidden files, and those that programs write before they rename them. */
const NOT_YET = /^\.|\.(tmp|part|partial|incomplete|filepart|crdownload|changing)$|~$/i;
const MOST_DEPTH = 16;
const MOST_FILES = 200_000;
const COLLATOR = new Intl.Collator("en", { numeric: true, caseFirst: "upper" });

/**
 * In order of their paths. A text table is taken only where an entry of plans.yaml names it: many a text file is a
 * table of something else.
 *
 * @param leaveOut folders of our own in it, such as that of the reports
 * @throws InputError when the folder cannot be read
 */
export async function findCandidates(
  folder: string,
  choices: readonly PlanChoice[],
  leaveOut: readonly string[],
): Promise<Candidate[]> {
  const paths = await filesBelow(folder, leaveOut);
  const single: Candidate[] = [];
  const together = new Map<string, string[]>();
  for (const path of paths) {
    const choice = choices.find((entry) => entry.files !== null && matchesPath(entry, path));
    if (!(await holdsVisibilities(join(folder, path), choice !== undefined))) continue;
    if (choice?.together !== true) {
      single.push({ path, files: [join(folder, path)] });
      continue;
    }
    const parent = path.includes("/") ? path.slice(0, path.lastIndexOf("/")) : ".";
    const key = `${choices.indexOf(choice)} ${parent}`;
    const files = together.get(key) ?? [];
    if (files.length === 0) together.set(key, files);
    files.push(join(folder, path));
  }
  const joined = [...together].map(([key, files]) => ({ path: key.slice(key.indexOf(" ") + 1), files }));
  return [...single, ...joined].sort((a, b) => inOrder(a.path, b.path));
}

function inOrder(a: string, b: string): number {
  return COLLATOR.compare(a, b) || (a < b ? -1 : a > b ? 1 : 0);
}

async function holdsVisibilities(path: string, named: boolean): Promise<boolean> {
  try {
    return (await kindOfFile(path, (head) => named || isBinaryTable(head))) !== null;
  } catch (error) {
    // A damaged or unreadable file is a dataset that cannot be judged, and is reported as one.
    if (error instanceof InputError) return true;
    throw error;
  }
}

async function filesBelow(folder: string, leaveOut: readonly string[]): Promise<string[]> {
  const found: string[] = [];
  const walk = async (below: string, depth: number): Promise<void> => {
    const here = join(folder, below);
    for (const name of (await namesIn(here, depth)).sort(inOrder)) {
      const path = below === "" ? name : `${below}/${name}`;
      const full = join(folder, path);
      if (NOT_YET.test(name) || leaveOut.includes(full)) continue;
      const status = await stat(full).catch(() => undefined);
      if (status?.isDirectory() && depth < MOST_DEPTH) await walk(path, depth + 1);
      if (!status?.isFile() || status.size === 0) continue;
      if (found.length === MOST_FILES) {
        throw new InputError(`more than ${MOST_FILES} files`, { file: folder }, "Name a folder with fewer");
      }
      found.push(path);
    }
  };
  await walk("", 0);
  return found;
}

async function namesIn(folder: string, depth: number): Promise<string[]> {
  try {
    return await readdir(folder);
  } catch (cause) {
    // Below the top, a folder that may not be read is somebody else's.
    if (depth > 0) return [];
    const code = (cause as NodeJS.ErrnoException).code ?? "";
    throw new InputError(
      `the folder cannot be read${code === "" ? "" : ` (${code})`}`,
      { file: folder },
      "Name the folder in which new datasets appear",
      { cause },
    );
  }
}
