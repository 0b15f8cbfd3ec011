/**
 * Columns of characters against the Unicode character database (East Asian Width, Unicode Standard Annex 11) as Python's
 * unicodedata holds it (display-width.py; Unicode 14).
 */
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { displayWidth } from "../../src/report/text/width.ts";
import { stored } from "../support/fresh.ts";
import { pythonJson, systemTool } from "../support/require.ts";

interface Reference {
  unicode: string;
  wide: [number, number][];
}
const reference = stored<Reference>("display-width");

function notWide({ wide }: Reference): string[] {
  const narrow: string[] = [];
  for (const [first, last] of wide) {
    for (let code = first; code <= last; code++) {
      const character = String.fromCodePoint(code);
      // Marks that combine take no column of their own, wide or not.
      if (/^[\p{Mn}\p{Me}]$/u.test(character)) continue;
      if (displayWidth(character) !== 2) narrow.push(code.toString(16));
    }
  }
  return narrow;
}

describe("displayWidth against Unicode's East Asian Width", () => {
  it("gives every wide or fullwidth character two columns: a guess too narrow would break a line", () => {
    expect(reference.wide.length).toBeGreaterThan(100);
    expect(notWide(reference)).toEqual([]);
  });

  it.skipIf(systemTool("astropy") === undefined)(
    "holds for this machine's Unicode too, whatever its version",
    () => {
      const fresh = pythonJson(fileURLToPath(new URL("display-width.py", import.meta.url))) as Reference;
      if (fresh.unicode === reference.unicode) expect(fresh).toEqual(reference);
      expect(notWide(fresh)).toEqual([]);
    },
  );

  it("gives the letters of narrow scripts one", () => {
    for (const character of "aZ9-éλΩЖאع±×→│")
      expect([character, displayWidth(character)]).toEqual([character, 1]);
  });
});
