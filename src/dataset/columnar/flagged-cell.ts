/** Cells of flags and weights with samples flagged, in the way that the column already writes them. */
import { CannotHoldFlags } from "../cannot-hold.ts";
import { isNothing } from "./cells.ts";

/** What flags a sample: a flag that says yes, or a weight or sigma below zero. */
export type FlagWay = "flag" | "sign";

/** By how the column says no. */
const YES: Readonly<Record<string, string>> = {
  "0": "1",
  "1": "1",
  "0.0": "1.0",
  "1.0": "1.0",
  false: "true",
  False: "True",
  FALSE: "TRUE",
  f: "t",
  F: "T",
  no: "yes",
  No: "Yes",
  NO: "YES",
  n: "y",
  N: "Y",
};

/** Edits the text of cells; remembers how the column says yes and no, for cells that say nothing. */
export class TextFlagger {
  readonly #way: FlagWay;
  #yes = "1";

  constructor(way: FlagWay) {
    this.#way = way;
  }

  /**
   * The text of a cell without quotes, with the samples taken flagged.
   *
   * @param taken (length) of the cell's samples, 1: taken
   */
  edit(text: string, taken: Uint8Array): string {
    const list = /^(\s*\[)([^\]]*)(\]\s*)$/.exec(text);
    if (list !== null) {
      let i = 0;
      const edited = list[2]!.replace(/[^\s,;]+/g, (word) =>
        taken[i++] === 1 ? this.#flagged(word) : this.#seen(word),
      );
      return `${list[1]}${edited}${list[3]}`;
    }
    if (!taken.includes(1)) return this.#seen(text);
    if (!taken.includes(0)) return this.#flagged(text);
    // One word for a whole row of samples, some of which are to be flagged: each gets its own.
    const words = Array.from(taken, (one) =>
      one === 1 ? this.#flagged(text.trim()) : this.#kept(text.trim()),
    );
    return `[${words.join(" ")}]`;
  }

  #kept(word: string): string {
    if (this.#way === "sign" || !isNothing(word)) return word;
    return Object.keys(YES).find((no) => YES[no] === this.#yes && no !== this.#yes)!;
  }

  #seen(word: string): string {
    if (this.#way === "flag") this.#yes = YES[word.trim()] ?? this.#yes;
    return word;
  }

  #flagged(word: string): string {
    if (this.#way === "sign") return negative(word);
    const bare = word.trim();
    const yes = YES[bare];
    if (yes !== undefined) {
      this.#yes = yes;
      return word.replace(bare, yes);
    }
    // Any other word that is not nothing says yes already.
    return isNothing(word) ? this.#yes : word;
  }
}

/** A positive number as text, with a minus before it; anything else as it is. */
function negative(word: string): string {
  const match = /^(\s*)\+?((?:\d+\.?\d*|\.\d+)(?:[eE][+-]?\d+)?)(\s*)$/.exec(word);
  if (match === null || !(Number(match[2]) > 0)) return word;
  return `${match[1]}-${match[2]}${match[3]}`;
}

/**
 * A typed cell with the samples taken flagged: yes in the type that it has, or the negative of a positive number.
 *
 * @param value a boolean, number, bigint, text or null
 * @param yes what says yes where the cell is null
 */
export function flaggedValue(value: unknown, way: FlagWay, yes: unknown): unknown {
  if (way === "flag") {
    if (typeof value === "boolean") return true;
    if (typeof value === "bigint") return 1n;
    if (typeof value === "number") return 1;
    if (typeof value === "string") return new TextFlagger("flag").edit(value, Uint8Array.of(1));
    if (value === null || value === undefined) return yes;
  } else {
    if (typeof value === "bigint") return value > 0n ? -value : value;
    if (typeof value === "number") return value > 0 && value < Number.POSITIVE_INFINITY ? -value : value;
    if (typeof value === "string") return negative(value);
    if (value === null || value === undefined) return value;
  }
  throw new CannotHoldFlags("the column holds values that cannot be changed");
}
