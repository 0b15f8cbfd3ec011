/** A number and its unit stay on one line, in text and on the page. */

const UNIT =
  /(?<=\d) (?=(?:%|deg|arcmin|arcsec|mas|uas|rad|[kMGT]?Hz|[munk]?Jy|[kcm]?m|[mn]?s|min|h|d|[kM]?λ|[kMGT]?B|sigma|times|UTC|J2000|B1950)(?![\p{L}\d]))/gu;

export const NO_BREAK_SPACE = "\u00a0";

/** `text` with a space that may not be broken between each number and its unit. */
export function boundUnits(text: string): string {
  return text.replace(UNIT, NO_BREAK_SPACE);
}
