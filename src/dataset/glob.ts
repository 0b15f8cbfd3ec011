/** Patterns for file names: * and ? within a name, [abc], [a-z] and [!a-z] for one character, ** for any folders. */
import { sep } from "node:path";
import { InputError } from "../util/errors.ts";

export interface NamePattern {
  readonly test: RegExp;
  /** it begins with a dot, and so may match hidden files */
  readonly hidden: boolean;
}

export interface GlobPattern {
  /** the folders before the first wildcard; empty: the working folder */
  readonly root: string;
  /** at least one; a pattern for each name below the root, or ** */
  readonly parts: readonly (NamePattern | "**")[];
}

const MOST_LENGTH = 4096;

export function hasWildcard(text: string): boolean {
  return /[*?]|\[[^\]]+\]/.test(text);
}

/** @throws InputError when it is too long to be a pattern */
export function globPattern(glob: string): GlobPattern {
  if (glob.length > MOST_LENGTH) {
    throw new InputError(`the pattern has ${glob.length} characters: expected at most ${MOST_LENGTH}`);
  }
  const names = (sep === "\\" ? glob.replaceAll("\\", "/") : glob).split("/");
  const first = names.findIndex(hasWildcard);
  const before = names.slice(0, first);
  const root = before.length === 1 && before[0] === "" ? "/" : before.join("/");
  const parts = names.slice(first).filter((name) => name !== "" && name !== ".");
  // Neighbouring ** are one: else each would walk all the folders again.
  const kept = parts.filter((name, i) => name !== "**" || parts[i - 1] !== "**");
  return {
    root,
    parts: kept.map((name) =>
      name === "**" ? name : { test: nameTest(name), hidden: name.startsWith(".") },
    ),
  };
}

/** Neighbouring stars are one, so that matching stays quick; every other character stands for itself. */
function nameTest(name: string): RegExp {
  let source = "";
  for (let i = 0; i < name.length; i++) {
    const character = name[i]!;
    const end = character === "[" ? name.indexOf("]", i + 2) : -1;
    if (character === "*") {
      if (name[i - 1] !== "*") source += ".*";
    } else if (character === "?") source += ".";
    else if (end > 0) {
      source += characterClass(name.slice(i + 1, end));
      i = end;
    } else source += literal(character);
  }
  try {
    return new RegExp(`^${source}$`, "su");
  } catch {
    throw new InputError(`"${name}" is no pattern`, {}, "A range such as [0-9] runs from low to high");
  }
}

function characterClass(inside: string): string {
  const negated = inside.startsWith("!") || inside.startsWith("^");
  const body = (negated ? inside.slice(1) : inside).replace(/[\\\]^[]/g, "\\$&");
  return `[${negated ? "^" : ""}${body}]`;
}

function literal(character: string): string {
  return character.replace(/[\\^$.*+?()[\]{}|/]/, "\\$&");
}
