/** An output that would be found as a part of its own input is refused. */
import { realpath, stat } from "node:fs/promises";
import { basename, dirname, relative, resolve, sep } from "node:path";
import { globPattern, hasWildcard } from "../../dataset/glob.ts";
import { InputError } from "../../util/errors.ts";

/**
 * @param named what the user named as the dataset: files, folders, globs
 * @throws InputError when `out` would be made inside a folder that is the dataset, or match its pattern
 */
export async function refuseInside(named: readonly string[], out: string): Promise<void> {
  const parent = await real(dirname(resolve(out)));
  for (const name of named) {
    const status = await stat(name).catch(() => undefined);
    const found =
      status === undefined && hasWildcard(name)
        ? await matches(name, parent, basename(out))
        : status?.isDirectory() === true && isWithin(parent, await real(resolve(name)));
    if (!found) continue;
    throw new InputError(
      `the copy would be made among the files of the dataset ${name}, and found as a part of it`,
      { file: out },
      "Choose a name for --out elsewhere",
    );
  }
}

async function matches(glob: string, parent: string, name: string): Promise<boolean> {
  const { root, parts } = globPattern(glob);
  const top = await real(resolve(root === "" ? "." : root));
  if (!isWithin(parent, top)) return false;
  const deep = parts.includes("**");
  const depth = relative(top, parent)
    .split(sep)
    .filter((part) => part !== "").length;
  const last = parts.at(-1)!;
  return (deep || depth === parts.length - 1) && (last === "**" || last.test.test(name));
}

function isWithin(path: string, folder: string): boolean {
  const way = relative(folder, path);
  return way === "" || (way !== ".." && !way.startsWith(`..${sep}`) && resolve(folder, way) === path);
}

async function real(path: string): Promise<string> {
  return realpath(path).catch(() => path);
}
