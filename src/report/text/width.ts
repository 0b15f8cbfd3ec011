/** Columns that text takes on a terminal, and lines cut to them. */
import { boundUnits, NO_BREAK_SPACE } from "../bound-units.ts";

/**
 * Characters two columns wide: the ranges of East Asian Width W and F (Unicode Standard Annex 11) and the pictographs
 * shown as pictures, taken together into whole blocks. Too wide a guess leaves a gap; too narrow a one breaks the line.
 */
const WIDE: readonly (readonly [number, number])[] = [
  [0x1100, 0x115f],
  [0x231a, 0x231b],
  [0x2329, 0x232a],
  [0x23e9, 0x23f3],
  [0x25fd, 0x25fe],
  [0x2614, 0x2615],
  [0x2630, 0x2637],
  [0x2648, 0x2653],
  [0x267f, 0x2693],
  [0x26a1, 0x26ff],
  [0x2705, 0x2757],
  [0x2795, 0x27bf],
  [0x2b1b, 0x2b55],
  [0x2e80, 0x303e],
  [0x3041, 0xa4cf],
  [0xa960, 0xa97f],
  [0xac00, 0xd7a3],
  [0xf900, 0xfaff],
  [0xfe10, 0xfe1f],
  [0xfe30, 0xfe6f],
  [0xff01, 0xff60],
  [0xffe0, 0xffe6],
  [0x16fe0, 0x18dff],
  [0x1aff0, 0x1b2ff],
  [0x1d300, 0x1d37f],
  [0x1f000, 0x1faff],
  [0x20000, 0x3fffd],
];

const COMBINING = /^[\p{Mn}\p{Me}\p{Cf}]$/u;

function characterWidth(character: string): number {
  const code = character.codePointAt(0)!;
  if (code < 0x300) return 1;
  if (COMBINING.test(character)) return 0;
  return WIDE.some(([low, high]) => code >= low && code <= high) ? 2 : 1;
}

/** Columns of `text`, which must be printable (see plainText). */
export function displayWidth(text: string): number {
  let width = 0;
  for (const character of text) width += characterWidth(character);
  return width;
}

/** `text` and spaces up to `width` columns, the text at the left or, for numbers, at the right. */
export function pad(text: string, width: number, side: "left" | "right" = "left"): string {
  const spaces = " ".repeat(Math.max(0, width - displayWidth(text)));
  return side === "left" ? text + spaces : spaces + text;
}

/** The words of a text, a number and its unit being one of them. */
function wordsOf(text: string): string[] {
  const words = boundUnits(text).split(" ");
  return words.filter((word) => word !== "").map((word) => word.replaceAll(NO_BREAK_SPACE, " "));
}

/**
 * Lines of at most `width` columns, broken at spaces; a longer word is cut. Spaces that begin the text stay.
 * @param width 2 or more: a wide character needs two
 */
export function wrap(text: string, width: number): string[] {
  const room = Math.max(2, width);
  const lead = /^ */.exec(text)![0].slice(0, Math.max(0, room - 2));
  const lines: string[] = [];
  let line = lead;
  let empty = true;
  for (const word of wordsOf(text)) {
    let rest = word;
    if (!empty && displayWidth(line) + 1 + displayWidth(rest) > room) {
      lines.push(line);
      line = lead;
      empty = true;
    }
    while (displayWidth(line) + (empty ? 0 : 1) + displayWidth(rest) > room) {
      const [head, tail] = cutAt(rest, room - displayWidth(line));
      lines.push(line + head);
      rest = tail;
      line = lead;
    }
    line += (empty ? "" : " ") + rest;
    empty = rest === "" && line === lead;
  }
  if (!empty || lines.length === 0) lines.push(line);
  return lines;
}

/** The longest start of `word` that takes at most `width` columns (at least one character), and the rest. */
function cutAt(word: string, width: number): [string, string] {
  let head = "";
  let used = 0;
  for (const character of word) {
    const wide = characterWidth(character);
    if (head !== "" && used + wide > width) break;
    head += character;
    used += wide;
  }
  return [head, word.slice(head.length)];
}
