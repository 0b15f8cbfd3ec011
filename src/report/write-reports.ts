/** The four files of a check, each beside its final name and renamed into place. */
import { join } from "node:path";
import { writeTextFile } from "../util/write-file.ts";
import { writeHtml } from "./html.ts";
import { flagsJson, reportJson } from "./json.ts";
import { makeFolder } from "./make-folder.ts";
import type { Check } from "./report.ts";
import { writeText } from "./text.ts";

/** Columns of report.txt. */
const TEXT_WIDTH = 80;

/**
 * @param folder made where it is not there; files of the same names are replaced
 * @returns the paths written, the page first
 * @throws InputError when the folder or a file cannot be written
 */
export async function writeReports(check: Check, folder: string): Promise<string[]> {
  // All is made before anything is written: a defect in one report leaves the files of an earlier run alone.
  const files: readonly (readonly [string, string])[] = [
    ["report.html", writeHtml(check)],
    ["report.txt", writeText(check, { width: TEXT_WIDTH, colour: false })],
    ["report.json", reportJson(check)],
    ["flags.json", flagsJson(check)],
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
