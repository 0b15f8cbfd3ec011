import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { displayWidth, pad, wrap } from "../../src/report/text/width.ts";
import { plainText } from "../../src/util/terminal.ts";

describe("displayWidth", () => {
  it("counts combining marks as nothing and wide characters as two columns", () => {
    expect(displayWidth("Q07")).toBe(3);
    expect(displayWidth("e\u0301")).toBe(1);
    expect(displayWidth("漢字")).toBe(4);
    expect(displayWidth("🛰")).toBe(2);
    expect(displayWidth("λ")).toBe(1);
  });
});

describe("pad", () => {
  it("fills to columns, not to characters", () => {
    expect(pad("漢", 4)).toBe("漢  ");
    expect(pad("7", 3, "right")).toBe("  7");
    expect(pad("too long", 3)).toBe("too long");
  });
});

describe("wrap", () => {
  it("breaks at spaces and keeps a number with its unit", () => {
    expect(wrap("loses 18.7 % of its peak", 11)).toEqual(["loses", "18.7 % of", "its peak"]);
  });

  it("cuts a word that no line could hold", () => {
    expect(wrap("ab cdefgh", 3)).toEqual(["ab", "cde", "fgh"]);
  });

  it("keeps an indent", () => {
    expect(wrap("  after flags", 8)).toEqual(["  after", "  flags"]);
  });

  it("gives one empty line for no text", () => {
    expect(wrap("", 10)).toEqual([""]);
  });

  it("never exceeds the width and loses nothing but spaces, whatever the text", () => {
    const texts = fc.string({ unit: "grapheme", maxLength: 120 });
    fc.assert(
      fc.property(texts, fc.integer({ min: 2, max: 40 }), (written, width) => {
        const text = plainText(written);
        const lines = wrap(text, width);
        for (const line of lines) expect(displayWidth(line)).toBeLessThanOrEqual(width);
        expect(lines.join("").replaceAll(" ", "")).toBe(text.replaceAll(/[ \u00a0]/g, ""));
      }),
    );
  });
});
