/** Several text files of one folder, each beside its final name and renamed into place. */
import { join } from "node:path";
import { writeTextFile } from "../util/write-file.ts";
import { makeFolder } from "./make-folder.ts";

/**
 * @param folder made where it is not there; files of the same names are replaced
 * @param files  names and texts, all made before any is written: a defect in one leaves the files of an earlier run alone
 * @returns the paths written, in that order
 * @throws InputError when the folder or a file cannot be written
 */
export async function writeTexts(
  folder: string,
  files: readonly (readonly [name: string, text: string])[],
): Promise<string[]> {
  await makeFolder(folder);
  const paths: string[] = [];
  for (const [name, text] of files) {
    const path = join(folder, name);
    await writeTextFile(path, text);
    paths.push(path);
  }
  return paths;
}
