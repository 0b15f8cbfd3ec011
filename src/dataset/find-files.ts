/** From what a user names (a file, a folder, a quoted glob, or several of these) to files. */
import { readdir, stat } from "node:fs/promises";
import { join, sep } from "node:path";
import { InputError } from "../util/errors.ts";
import { globPattern, hasWildcard } from "./glob.ts";

export interface FoundFiles {
  /** each once; those of a folder or glob by name, those of a list in its order */
  readonly paths: readonly string[];
  /** false: the user named each of them, and one that holds no visibilities is a mistake */
  readonly searched: boolean;
  /** what the user named, for messages */
  readonly asked: string;
}

/** Names in a folder that are no part of an observation: hidden files. */
const HIDDEN = /^\./;
/** Folders deep, and entries looked at, before a search is given up. */
const MOST_DEPTH = 32;
const MOST_ENTRIES = 1_000_000;

/** @throws InputError when there is no such file or folder, or nothing matches */
export async function findFiles(named: string | readonly string[]): Promise<FoundFiles> {
  const asked = typeof named === "string" ? [named] : named;
  if (asked.length === 0)
    throw new InputError("no file is named", {}, "Name a file, a folder or a quoted glob");
  const found = await Promise.all(asked.map(findOne));
  return {
    paths: [...new Set(found.flatMap(({ paths }) => paths))],
    searched: found.every(({ searched }) => searched),
    asked: asked.length === 1 ? asked[0]! : `${asked[0]} and ${asked.length - 1} more`,
  };
}

async function findOne(asked: string): Promise<Omit<FoundFiles, "asked">> {
  const status = await stat(asked).catch(() => undefined);
  if (status?.isDirectory()) return { paths: await filesOfFolder(asked), searched: true };
  // A file may have a bracket in its name: what is there is taken as it is written.
  if (status !== undefined || !hasWildcard(asked)) return { paths: [asked], searched: false };
  const paths = await filesOfGlob(asked);
  if (paths.length > 0) return { paths, searched: true };
  throw new InputError(
    "no file matches",
    { file: asked },
    "Quote the pattern so that it arrives whole; * and ? stop at a /, ** does not",
  );
}

async function filesOfFolder(folder: string): Promise<string[]> {
  const entries = await entriesOf(folder);
  const files: string[] = [];
  for (const name of entries) {
    if (HIDDEN.test(name)) continue;
    const path = join(folder, name);
    if ((await stat(path).catch(() => undefined))?.isFile()) files.push(path);
  }
  if (files.length > 0) return files.sort(byName);
  throw new InputError(
    "there is no file in this folder",
    { file: folder },
    "Folders inside it are not searched: name them, or use a glob such as '**/*.fits'",
  );
}

async function entriesOf(folder: string): Promise<string[]> {
  try {
    return await readdir(folder);
  } catch (cause) {
    const code = (cause as NodeJS.ErrnoException).code;
    throw new InputError(`the folder cannot be read (${code})`, { file: folder }, undefined, { cause });
  }
}

/** Files whose path matches, folder by folder, so that only folders that can hold a match are read. */
async function filesOfGlob(glob: string): Promise<string[]> {
  const { root, parts } = globPattern(glob);
  const matched = new Set<string>();
  let looked = 0;
  const walk = async (folder: string, at: number, depth: number): Promise<void> => {
    const part = parts[at]!;
    const last = at === parts.length - 1;
    // ** is no folder as well as any number of them.
    if (part === "**" && !last) await walk(folder, at + 1, depth);
    const names = await readdir(folder === "" ? "." : folder).catch(() => []);
    for (const name of names) {
      if (++looked > MOST_ENTRIES || depth > MOST_DEPTH) {
        throw new InputError("too many folders match", { file: glob }, "Begin the pattern further down");
      }
      if (HIDDEN.test(name) && !(part !== "**" && part.hidden)) continue;
      if (part !== "**" && !part.test.test(name)) continue;
      const path = folder === "" || folder.endsWith(sep) ? `${folder}${name}` : `${folder}${sep}${name}`;
      const status = await stat(path).catch(() => undefined);
      if (status?.isFile() && last) matched.add(path);
      if (!status?.isDirectory()) continue;
      if (part === "**") await walk(path, at, depth + 1);
      else if (!last) await walk(path, at + 1, depth + 1);
    }
  };
  await walk(root, 0, 0);
  return [...matched].sort(byName);
}

/** By name with numbers in order: part2 before part10. The same in every locale. */
const COLLATOR = new Intl.Collator("en", { numeric: true, caseFirst: "upper" });

function byName(a: string, b: string): number {
  return COLLATOR.compare(a, b) || (a < b ? -1 : a > b ? 1 : 0);
}
