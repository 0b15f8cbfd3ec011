/** Text from a file, a rule or the user on its way into a page. */
import { plainText } from "./terminal.ts";

const ENTITIES: Readonly<Record<string, string>> = {
  "&": "&amp;",
  "<": "&lt;",
  ">": "&gt;",
  '"': "&quot;",
  "'": "&#39;",
};

/**
 * `text` as HTML or SVG text, or as the inside of a quoted attribute. What cannot be printed goes first: a
 * bidirectional override in an antenna's name would turn the rest of a line around on the page too.
 */
export function escapeHtml(text: string): string {
  return plainText(text).replace(/[&<>"']/g, (character) => ENTITIES[character]!);
}
