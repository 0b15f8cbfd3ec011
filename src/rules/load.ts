/** Find the rule files in force: ours, and those of the folders the user names, which add to ours or replace them. */
import { lstat, readdir, stat } from "node:fs/promises";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { InputError, nearest, type Place } from "../util/errors.ts";
import { readSmallText } from "../util/small-text.ts";
import { requireKnownNames } from "./catalogue.ts";
import { FAMILIES } from "./finding.ts";
import type { Rule, RuleSet } from "./rule.ts";
import { readRule } from "./schema.ts";
import { YamlDocument } from "./yaml-document.ts";

export type { Rule, RuleSet } from "./rule.ts";

/** The rules of the package, from the sources as from the build. */
const OUR_RULES = fileURLToPath(new URL("../../rules", import.meta.url));
export const OURS = "ours";

/** Characters. */
const LARGEST_FILE = 64 * 1024;
const MOST_FILES = 1000;
const DEEPEST_FOLDER = 4;

/**
 * @param folders each a folder of rule files (looked through to a depth of 4) or one rule file; later ones win
 * @throws InputError at the file, line and column of a rule that is not right
 */
export async function loadRules(folders: readonly string[] = []): Promise<RuleSet> {
  const rules = new Map<string, Rule>();
  const off = new Map<string, string>();
  await addFolder(rules, off, OUR_RULES, OURS);
  for (const folder of folders) await addFolder(rules, off, folder, null);
  const inOrder = [...rules.values()].sort(byFamilyThenId);
  return { rules: inOrder, off: [...off].map(([id, from]) => ({ id, from })) };
}

function byFamilyThenId(a: Rule, b: Rule): number {
  const family = FAMILIES.indexOf(a.family) - FAMILIES.indexOf(b.family);
  return family !== 0 ? family : a.id < b.id ? -1 : a.id > b.id ? 1 : 0;
}

/** @param from what the rules say of their origin; null: their file */
async function addFolder(
  rules: Map<string, Rule>,
  off: Map<string, string>,
  folder: string,
  from: string | null,
): Promise<void> {
  const files = await ruleFiles(folder);
  if (files.length === 0) {
    throw new InputError(
      "no rule files in this folder",
      { file: folder },
      "A rule is a file ending in .yaml",
    );
  }
  const met = new Map<string, string>();
  for (const file of files) {
    const read = parseRule(await readRuleFile(file), file, from ?? file);
    const id = "off" in read ? read.off : read.rule.id;
    const twin = met.get(id);
    if (twin !== undefined) {
      throw new InputError(`rule "${id}" is also in ${twin}`, { file }, "Keep one of them, or rename it");
    }
    met.set(id, file);
    if ("off" in read) switchOff(rules, off, id, file, read.place);
    else {
      rules.set(id, read.rule);
      off.delete(id);
    }
  }
}

function switchOff(
  rules: Map<string, Rule>,
  off: Map<string, string>,
  id: string,
  file: string,
  place: Place,
): void {
  if (!rules.delete(id) && !off.has(id)) {
    const near = nearest(id, rules.keys());
    const hint = near === undefined ? "visvet explain lists the rules" : `Did you mean "${near}"?`;
    throw new InputError(`no rule "${id}" to switch off`, place, hint);
  }
  off.set(id, file);
}

/**
 * One rule from the text of its file, its measure and columns among those that are known.
 *
 * @param file as the user gave it, for errors
 * @param from what the rule says of its origin
 */
export function parseRule(text: string, file: string, from: string = file): ReturnType<typeof readRule> {
  const document = new YamlDocument(text, file);
  const read = readRule(document, from);
  if ("rule" in read) requireKnownNames(read.rule, document);
  return read;
}

async function readRuleFile(file: string): Promise<string> {
  const text = await readSmallText(file, "rule");
  if (text.length > LARGEST_FILE) {
    const found = `a rule of ${text.length} characters: at most ${LARGEST_FILE}`;
    throw new InputError(found, { file }, "Write one rule a file");
  }
  return text;
}

/** Files ending in .yaml or .yml, by path; links are not followed below the folder named. */
async function ruleFiles(folder: string): Promise<string[]> {
  const found: string[] = [];
  let isFile: boolean;
  try {
    isFile = (await stat(folder)).isFile();
  } catch (error) {
    throw new InputError("no such folder of rules", { file: folder }, "Check the path after --rules", {
      cause: error,
    });
  }
  if (isFile) return [folder];
  const walk = async (path: string, depth: number): Promise<void> => {
    for (const name of (await readdir(path)).sort()) {
      const inner = join(path, name);
      const entry = await lstat(inner);
      if (entry.isDirectory() && depth < DEEPEST_FOLDER) await walk(inner, depth + 1);
      else if (entry.isFile() && /\.ya?ml$/.test(name)) found.push(inner);
      if (found.length > MOST_FILES) {
        throw new InputError(
          `more than ${MOST_FILES} rule files`,
          { file: folder },
          "Is this the right folder?",
        );
      }
    }
  };
  await walk(folder, 0);
  return found;
}
