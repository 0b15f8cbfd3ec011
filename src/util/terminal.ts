/**
 * Text from a file or from the user on its way to a terminal or a text report.
 * Names in a dataset are hostile: an escape sequence in an antenna's name must not reach the screen.
 */

/**
 * Controls (C0, DEL, C1), line and paragraph separators, bidirectional marks, embeddings, overrides and isolates,
 * zero-width and other invisible format characters, tags, and lone surrogates.
 * Unicode 15: general categories Cc, Cf, Cs, Zl and Zp.
 */
const UNPRINTABLE = /[\p{Cc}\p{Cf}\p{Cs}\p{Zl}\p{Zp}]/gu;

/** `text` on one line with everything unprintable taken out; a tab or a line end becomes a space. */
export function plainText(text: string): string {
  return text.replace(/[\t\n\r\v\f\u0085\u2028\u2029]+/gu, " ").replace(UNPRINTABLE, "");
}

/** `plainText` cut to at most `columns` characters, the last of them an ellipsis where something was cut. */
export function plainTextWithin(text: string, columns: number): string {
  const characters = Array.from(plainText(text));
  if (characters.length <= columns) return characters.join("");
  return columns < 1 ? "" : `${characters.slice(0, columns - 1).join("")}…`;
}
