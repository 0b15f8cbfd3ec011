/**
 * Errors meant for the person at the keyboard: what was found and expected, where, and what to do.
 * Everything else that is thrown is a defect of ours.
 */

/** Where in the input something was found. Parts that do not apply are left out. */
export interface Place {
  /** path as the user gave it */
  file?: string;
  /** such as "HDU 2 (AN table)" or "plan" */
  part?: string;
  /** byte offset from the start of the file, from 0 */
  byte?: number;
  /** group or table row, from 1 */
  row?: number;
  /** text files: line and column, from 1 */
  line?: number;
  column?: number;
}

/** Bad input or bad usage: prints as one line and ends the command with exit status 2. */
export class InputError extends Error {
  readonly place: Place;
  /** what to do about it, a sentence without its full stop */
  readonly advice: string | undefined;

  constructor(found: string, place: Place = {}, advice?: string, options?: ErrorOptions) {
    super(found, options);
    this.name = "InputError";
    this.place = place;
    this.advice = advice;
  }

  /** One line: `file, part, byte N: what. What to do.` Control characters are for the edge to strip. */
  get line(): string {
    const where = placeText(this.place);
    const advice = this.advice === undefined ? "" : `. ${this.advice}`;
    return `${where === "" ? "" : `${where}: `}${this.message}${advice}`;
  }
}

function placeText(place: Place): string {
  const parts: string[] = [];
  if (place.file !== undefined) parts.push(place.file);
  if (place.part !== undefined) parts.push(place.part);
  if (place.byte !== undefined) parts.push(`byte ${place.byte}`);
  if (place.row !== undefined) parts.push(`row ${place.row}`);
  if (place.line !== undefined) {
    parts.push(`line ${place.line}${place.column === undefined ? "" : `, column ${place.column}`}`);
  }
  return parts.join(", ");
}

/**
 * The known word nearest to a misspelt one, or undefined when none is near.
 * Near: an edit distance of at most a third of its length (Damerau 1964, Commun. ACM 7, 171).
 */
export function nearest(word: string, known: Iterable<string>): string | undefined {
  let best: string | undefined;
  let bestDistance = Number.POSITIVE_INFINITY;
  for (const candidate of known) {
    const distance = editDistance(word.toLowerCase(), candidate.toLowerCase());
    if (distance < bestDistance && distance <= Math.max(1, Math.floor(candidate.length / 3))) {
      best = candidate;
      bestDistance = distance;
    }
  }
  return best;
}

/** Insertions, deletions, substitutions and swaps of neighbours that turn one word into the other. */
function editDistance(a: string, b: string): number {
  let beforeLast: number[] = [];
  let last = Array.from({ length: b.length + 1 }, (_, j) => j);
  for (let i = 1; i <= a.length; i++) {
    const current = [i];
    for (let j = 1; j <= b.length; j++) {
      const substitution = last[j - 1]! + (a[i - 1] === b[j - 1] ? 0 : 1);
      let least = Math.min(last[j]! + 1, current[j - 1]! + 1, substitution);
      if (i > 1 && j > 1 && a[i - 1] === b[j - 2] && a[i - 2] === b[j - 1]) {
        least = Math.min(least, beforeLast[j - 2]! + 1);
      }
      current.push(least);
    }
    beforeLast = last;
    last = current;
  }
  return last[b.length]!;
}
