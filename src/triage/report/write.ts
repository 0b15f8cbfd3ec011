/** The files of a triage, each beside its final name and renamed into place. */
import { join } from "node:path";
import { makeFolder } from "../../report/make-folder.ts";
import { writeTextFile } from "../../util/write-file.ts";
import type { Triage } from "../triage.ts";
import { triageFlagsJson, triageJson } from "./json.ts";
import { triagePage } from "./page.ts";
import { triageText } from "./text.ts";

/** Columns of triage.txt. */
const TEXT_WIDTH = 80;

/**
 * @param folder made where it is not there; files of the same names are replaced
 * @returns the paths written, the page first
 * @throws InputError when the folder or a file cannot be written
 */
export async function writeTriage(triage: Triage, folder: string): Promise<string[]> {
  // All is made before anything is written: a defect in one report leaves the files of an earlier run alone.
  const files: readonly (readonly [string, string])[] = [
    ["triage.html", triagePage(triage)],
    ["triage.txt", triageText(triage, { width: TEXT_WIDTH, colour: false })],
    ["triage.json", triageJson(triage)],
    ["flags.json", triageFlagsJson(triage)],
  ];
  await makeFolder(folder);
  const paths: string[] = [];
  for (const [name, text] of files) {
    const path = join(folder, name);
    await writeTextFile(path, text);
    paths.push(path);
  }
  return paths;
}
