/**
 * Header blocks as FITS wants them written: 80-character cards, 36 a block, fixed format where a value fits it.
 * FITS Standard 4.0, sections 3.2, 4.1 and 4.2.
 */

/** A block, bytes: headers and data are padded to it. */
export const BLOCK = 2880;
export const CARD = 80;

/** A number that must read as floating point even when it is whole. */
export interface Real {
  readonly real: number;
}

/** A card to write. Without a value the comment is commentary text (COMMENT, HISTORY). */
export interface CardToWrite {
  readonly keyword: string;
  /** a `number` must be a whole number; use `real(x)` for floating point */
  readonly value?: string | number | boolean | Real;
  readonly comment?: string;
}

export function real(value: number): Real {
  return { real: value };
}

export function card(keyword: string, value: string | number | boolean | Real, comment = ""): CardToWrite {
  return { keyword, value, comment };
}

/**
 * The cards with END, padded with blanks to whole blocks. A string too long for a card continues on CONTINUE cards;
 * characters outside printable ASCII become `?`, since FITS has no others.
 *
 * @throws RangeError for a keyword or number that FITS cannot hold (a defect of the caller)
 */
export function headerBlocks(cards: readonly CardToWrite[]): Uint8Array {
  const lines = cards.flatMap(cardLines);
  lines.push("END".padEnd(CARD));
  const bytes = new Uint8Array(Math.ceil((lines.length * CARD) / BLOCK) * BLOCK).fill(0x20);
  lines.forEach((line, i) => {
    for (let j = 0; j < CARD; j++) bytes[i * CARD + j] = line.charCodeAt(j);
  });
  return bytes;
}

/** One card as its 80-character lines: one, or several for a long string. */
export function cardLines({ keyword, value, comment = "" }: CardToWrite): string[] {
  if (!/^[A-Z0-9_-]{1,8}$/.test(keyword)) throw new RangeError(`keyword "${keyword}" is not a FITS keyword`);
  const note = ascii(comment);
  if (value === undefined) return [`${keyword.padEnd(8)}${note}`.slice(0, CARD).padEnd(CARD)];
  const start = `${keyword.padEnd(8)}= `;
  if (typeof value === "string") return stringLines(start, ascii(value), note);
  return [withComment(`${start}${plainValue(keyword, value).padStart(20)}`, note)];
}

function plainValue(keyword: string, value: number | boolean | Real): string {
  if (typeof value === "boolean") return value ? "T" : "F";
  if (typeof value === "object") return realText(keyword, value.real);
  if (!Number.isSafeInteger(value)) throw new RangeError(`${keyword} = ${value}: expected a whole number`);
  return String(value);
}

/** The shortest digits that read back as the same double. */
function realText(keyword: string, value: number): string {
  if (!Number.isFinite(value))
    throw new RangeError(`${keyword} = ${value}: a FITS header holds finite numbers`);
  const text = String(value).toUpperCase().replace("E+", "E");
  const [mantissa, exponent] = text.split("E") as [string, string?];
  const pointed = mantissa.includes(".") ? mantissa : `${mantissa}.0`;
  return exponent === undefined ? pointed : `${pointed}E${exponent}`;
}

function stringLines(start: string, text: string, comment: string): string[] {
  const quoted = text.replaceAll("'", "''");
  if (quoted.length <= 68) return [withComment(`${start}${`'${quoted.padEnd(8)}'`.padEnd(20)}`, comment)];
  const lines: string[] = [];
  let rest = quoted;
  while (rest.length > 0) {
    let take = Math.min(67, rest.length);
    // A doubled quote must not be torn apart.
    while (take < rest.length && (/'*$/.exec(rest.slice(0, take))?.[0].length ?? 0) % 2 === 1) take -= 1;
    const more = take < rest.length ? "&" : "";
    const head = lines.length === 0 ? start : "CONTINUE  ";
    lines.push(`${head}'${rest.slice(0, take)}${more}'`.padEnd(CARD));
    rest = rest.slice(take);
  }
  return lines;
}

function withComment(text: string, comment: string): string {
  return (comment === "" ? text : `${text} / ${comment}`).slice(0, CARD).padEnd(CARD);
}

/** Printable ASCII only. */
export function ascii(text: string): string {
  return text.replace(/[^\x20-\x7e]/gu, "?");
}

/** Bytes missing from `length` to a whole block. */
export function padding(length: number): number {
  return (BLOCK - (length % BLOCK)) % BLOCK;
}
