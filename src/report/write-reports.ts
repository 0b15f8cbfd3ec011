/** The four files of a check, each beside its final name and renamed into place. */
import { writeHtml } from "./html.ts";
import { flagsJson, reportJson } from "./json.ts";
import type { Check } from "./report.ts";
import { writeText } from "./text.ts";
import { writeTexts } from "./write-texts.ts";

/** Columns of report.txt. */
const TEXT_WIDTH = 80;

/**
 * @param folder made where it is not there; files of the same names are replaced
 * @returns the paths written, the page first
 * @throws InputError when the folder or a file cannot be written
 */
export function writeReports(check: Check, folder: string): Promise<string[]> {
  return writeTexts(folder, [
    ["report.html", writeHtml(check)],
    ["report.txt", writeText(check, { width: TEXT_WIDTH, colour: false })],
    ["report.json", reportJson(check)],
    ["flags.json", flagsJson(check)],
  ]);
}
