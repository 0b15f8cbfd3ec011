/**
 * A header unit: its value cards by keyword, read block by block up to END. FITS Standard 4.0, sections 3.3 and 4.
 * Getters give undefined for a missing keyword and refuse a value of the wrong kind, naming its byte.
 */
import { InputError, type Place } from "../../util/errors.ts";
import type { Cursor } from "./byte-source.ts";
import { type Card, type CardValue, parseCard } from "./cards.ts";
import { BLOCK, CARD } from "./write-header.ts";

/** Longest header read, bytes: 200 000 cards. More is a file without END, or an attack on memory. */
export const MOST_HEADER_BYTES = 16 * 1024 * 1024;

interface Kept {
  readonly value: CardValue;
  readonly byte: number;
}

export class Header {
  /** file and HDU, for messages */
  readonly place: Place;
  /** keywords that stand twice with different values; the first one counts */
  readonly contradictions: readonly string[];
  readonly #values: ReadonlyMap<string, Kept>;

  constructor(place: Place, values: ReadonlyMap<string, Kept>, contradictions: readonly string[] = []) {
    this.place = place;
    this.#values = values;
    this.contradictions = contradictions;
  }

  /** The same cards with another name of the HDU in messages. */
  at(place: Place): Header {
    return new Header(place, this.#values, this.contradictions);
  }

  has(keyword: string): boolean {
    return this.#values.has(keyword);
  }

  keywords(): IterableIterator<string> {
    return this.#values.keys();
  }

  /** A string; undefined when missing or without value. @throws InputError when it is not a string */
  text(keyword: string): string | undefined {
    const value = this.#values.get(keyword)?.value;
    if (value === undefined || value === null) return undefined;
    if (typeof value !== "string") throw this.#wrong(keyword, value, "a string in quotes");
    return value;
  }

  /** @throws InputError when it is not a number */
  number(keyword: string): number | undefined {
    const value = this.#values.get(keyword)?.value;
    if (value === undefined || value === null) return undefined;
    if (typeof value !== "number" || !Number.isFinite(value)) {
      throw this.#wrong(keyword, value, "a number that a double can hold");
    }
    return value;
  }

  /** A whole number from `least` to `most`. @throws InputError for any other value */
  integer(keyword: string, least: number, most = Number.MAX_SAFE_INTEGER): number | undefined {
    const value = this.#values.get(keyword)?.value;
    if (value === undefined || value === null) return undefined;
    if (typeof value !== "number" || !Number.isInteger(value) || value < least || value > most) {
      const upTo = most === Number.MAX_SAFE_INTEGER ? `of ${least} or more` : `from ${least} to ${most}`;
      throw this.#wrong(keyword, value, `a whole number ${upTo}`);
    }
    return value;
  }

  /** @throws InputError when it is missing, too */
  requiredInteger(keyword: string, least: number, most?: number): number {
    const value = this.integer(keyword, least, most);
    if (value === undefined) throw this.error(`${keyword} is missing: expected a whole number`);
    return value;
  }

  /** @throws InputError when it is neither T nor F */
  logical(keyword: string): boolean | undefined {
    const value = this.#values.get(keyword)?.value;
    if (value === undefined || value === null) return undefined;
    if (typeof value !== "boolean") throw this.#wrong(keyword, value, "T or F");
    return value;
  }

  /** The value as a string whatever its kind, never an error; for what is only shown. */
  shown(keyword: string): string | undefined {
    const value = this.#values.get(keyword)?.value;
    if (value === undefined || value === null) return undefined;
    return valueText(value);
  }

  /** A number, also one inside quotes; undefined for anything else. For keywords of secondary interest. */
  looseNumber(keyword: string): number | undefined {
    const value = this.#values.get(keyword)?.value;
    if (typeof value === "number") return Number.isFinite(value) ? value : undefined;
    if (typeof value !== "string" || value.trim() === "") return undefined;
    const number = Number(value.trim().replace(/[Dd]/, "E"));
    return Number.isFinite(number) ? number : undefined;
  }

  /** Byte of the keyword's card in the file. */
  byteOf(keyword: string): number | undefined {
    return this.#values.get(keyword)?.byte;
  }

  /** An InputError in this HDU, at the keyword's card when one is given. */
  error(found: string, keyword?: string, advice?: string): InputError {
    const byte = keyword === undefined ? undefined : this.byteOf(keyword);
    return new InputError(found, byte === undefined ? this.place : { ...this.place, byte }, advice);
  }

  #wrong(keyword: string, value: CardValue, expected: string): InputError {
    return this.error(`${keyword} is ${valueText(value)}: expected ${expected}`, keyword);
  }
}

function valueText(value: CardValue): string {
  if (value === null) return "empty";
  if (typeof value === "string") return value;
  if (typeof value === "number") return String(value);
  if (typeof value === "boolean") return value ? "T" : "F";
  return "complex" in value ? `(${value.complex.join(", ")})` : value.malformed;
}

/** A header read and the byte after its last block. */
export interface HeaderRead {
  readonly header: Header;
  readonly end: number;
}

/**
 * Read the header that starts at byte `start`.
 *
 * @throws InputError when the file ends or bytes that are no text come before END
 */
export async function readHeader(cursor: Cursor, start: number, place: Place): Promise<HeaderRead> {
  const block = Buffer.alloc(BLOCK);
  const builder = new HeaderBuilder();
  for (let at = start; at - start < MOST_HEADER_BYTES; at += BLOCK) {
    const got = await cursor.read(block, at);
    // A last block that ends right after END lacks only its padding; the cards before it are whole.
    for (let offset = 0; offset + CARD <= got; offset += CARD) {
      const text = block.toString("latin1", offset, offset + CARD);
      refuseBinary(text, { ...place, byte: at + offset });
      const card = parseCard(text);
      if (card.keyword === "END" && card.value === undefined) {
        builder.close();
        return { header: new Header(place, builder.values, [...builder.contradictions]), end: at + BLOCK };
      }
      builder.add(card, at + offset);
    }
    if (got < BLOCK) {
      throw new InputError(
        `the file ends at byte ${at + got}, inside a header: expected a card that says END`,
        { ...place, byte: at },
        "The copy is probably incomplete: compare its size with the original and copy it again",
      );
    }
  }
  throw new InputError(
    `no END in the first ${MOST_HEADER_BYTES} bytes of the header: expected a card that says END`,
    { ...place, byte: start },
    "The file is damaged, or is not FITS",
  );
}

/** A keyword is letters, digits, "-" and "_": other bytes there mean that the header has run into data. */
function refuseBinary(text: string, place: Place): void {
  for (let i = 0; i < 8; i++) {
    const code = text.charCodeAt(i);
    if ((code < 0x20 && code !== 0) || code > 0x7e) {
      throw new InputError(
        "found bytes that are no text where a header card should start: expected more cards, or END",
        place,
        "The header has lost its END card, or bytes are missing before this place: copy the file again",
      );
    }
  }
}

class HeaderBuilder {
  readonly values = new Map<string, Kept>();
  readonly contradictions = new Set<string>();
  /** a string that the next CONTINUE card may go on with */
  #open: { keyword: string; byte: number; parts: string[] } | undefined;

  add({ keyword, value }: Card, byte: number): void {
    if (keyword === "CONTINUE" && typeof value === "string" && this.#open !== undefined) {
      this.#open.parts.push(value);
      if (!value.endsWith("&")) this.close();
      return;
    }
    this.close();
    if (value === undefined || keyword === "" || keyword === "CONTINUE") return;
    const earlier = this.values.get(keyword);
    if (earlier !== undefined) {
      if (JSON.stringify(earlier.value) !== JSON.stringify(value)) this.contradictions.add(keyword);
      return;
    }
    this.values.set(keyword, { value, byte });
    if (typeof value === "string" && value.endsWith("&")) this.#open = { keyword, byte, parts: [value] };
  }

  /** Join the parts of a string: each but the last ends in the "&" that announces the next. */
  close(): void {
    if (this.#open === undefined) return;
    const { keyword, byte, parts } = this.#open;
    this.#open = undefined;
    if (parts.length === 1) return;
    const joined = parts.map((part, i) => (i < parts.length - 1 ? part.slice(0, -1) : part)).join("");
    this.values.set(keyword, { value: joined, byte });
  }
}
