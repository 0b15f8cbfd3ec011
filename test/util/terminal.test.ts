import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { plainText, plainTextWithin } from "../../src/util/terminal.ts";

describe("plainText", () => {
  it("takes out escape sequences, so that a name cannot colour or clear the screen", () => {
    expect(plainText("A\u001b[2J\u001b]0;title\u0007B")).toBe("A[2J]0;titleB");
    expect(plainText("A\u009b31mB")).toBe("A31mB");
  });

  it("keeps one line one line", () => {
    expect(plainText("one\r\ntwo\tthree\u2028four\u0085five")).toBe("one two three four five");
  });

  it("takes out bidirectional overrides, isolates, zero-width characters and tags", () => {
    expect(plainText("a\u202eb\u2066c\u2069d\u200be\u200ff\ufeffg\u{e0041}h")).toBe("abcdefgh");
  });

  it("takes out lone halves of surrogate pairs and NULs", () => {
    expect(plainText("a\ud800b\0c")).toBe("abc");
  });

  it("leaves printable text of any script as it is", () => {
    expect(plainText("Plateau Ä-7 Ω 天 🔭")).toBe("Plateau Ä-7 Ω 天 🔭");
  });

  it("gives nothing that a terminal obeys, whatever comes in", () => {
    fc.assert(
      fc.property(fc.string({ unit: "binary", maxLength: 50 }), (text) => {
        expect(plainText(text)).not.toMatch(/[\p{Cc}\p{Cf}\p{Zl}\p{Zp}]/u);
      }),
    );
  });
});

describe("plainTextWithin", () => {
  it("cuts to the columns given and shows that it did", () => {
    expect(plainTextWithin("antenna", 7)).toBe("antenna");
    expect(plainTextWithin("antennas", 7)).toBe("antenn…");
    expect(plainTextWithin("antennas", 0)).toBe("");
  });
});
