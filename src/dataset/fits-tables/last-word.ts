/** What a table holds, by its name. */
import type { Hdu } from "../fits/hdus.ts";

/** Of EXTNAME "ARRAY AN" the AN: the first word is anybody's. Names of one word are their own. Hostile text. */
export function lastWord({ name }: Pick<Hdu, "name">): string {
  return name.trim().split(/\s+/).at(-1) ?? "";
}
