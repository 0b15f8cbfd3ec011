/** HTML put together so that only what is markup already goes in unescaped. */
import { escapeHtml } from "../../util/html.ts";
import { boundUnits } from "../bound-units.ts";

/** Text that is HTML or SVG already. */
export class Markup {
  readonly text: string;

  constructor(text: string) {
    this.text = text;
  }
}

export type Piece = Markup | string | number | undefined | false | readonly Piece[];

/** html`<p>${anything}</p>`: strings are escaped, markup is not, lists are joined, undefined and false are nothing. */
export function html(texts: TemplateStringsArray, ...pieces: readonly Piece[]): Markup {
  return new Markup(texts.reduce((all, text, i) => all + rendered(pieces[i - 1]) + text));
}

function rendered(piece: Piece): string {
  if (piece === undefined || piece === false) return "";
  if (piece instanceof Markup) return piece.text;
  if (typeof piece === "string") return boundUnits(escapeHtml(piece));
  if (typeof piece === "number") return String(piece);
  return piece.map(rendered).join("");
}
