/** The program that writes the reports, by its package. */
import { readFileSync } from "node:fs";

// Two folders up from src/report and from dist/report alike.
const PACKAGE = new URL("../../package.json", import.meta.url);

export interface Tool {
  readonly name: string;
  readonly version: string;
}

let known: Tool | undefined;

export function tool(): Tool {
  if (known === undefined) {
    const { name, version } = JSON.parse(readFileSync(PACKAGE, "utf8")) as Tool;
    known = { name, version };
  }
  return known;
}
