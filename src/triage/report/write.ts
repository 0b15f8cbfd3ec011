/** The files of a triage, each beside its final name and renamed into place. */
import { writeTexts } from "../../report/write-texts.ts";
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
export function writeTriage(triage: Triage, folder: string): Promise<string[]> {
  return writeTexts(folder, [
    ["triage.html", triagePage(triage)],
    ["triage.txt", triageText(triage, { width: TEXT_WIDTH, colour: false })],
    ["triage.json", triageJson(triage)],
    ["flags.json", triageFlagsJson(triage)],
  ]);
}
