import fc from "fast-check";
import { parseHTML } from "linkedom";
import { describe, expect, it } from "vitest";
import { escapeHtml } from "../../src/util/html.ts";
import { plainText } from "../../src/util/terminal.ts";

describe("escapeHtml", () => {
  it("escapes what HTML would take for markup, in text and in quoted attributes", () => {
    expect(escapeHtml(`<b a="1" b='2'>&`)).toBe("&lt;b a=&quot;1&quot; b=&#39;2&#39;&gt;&amp;");
  });

  it("takes out controls and direction marks", () => {
    expect(escapeHtml("Q\u202e07\u001b[31m\nx")).toBe("Q07[31m x");
  });

  it("gives back the plain text when a parser reads it, whatever it was", () => {
    fc.assert(
      fc.property(fc.string({ unit: "binary", maxLength: 60 }), (text) => {
        const { document } = parseHTML(
          `<!doctype html><body><p title="${escapeHtml(text)}">x${escapeHtml(text)}</p></body>`,
        );
        expect(document.querySelector("p")!.textContent).toBe(`x${plainText(text)}`);
        expect(document.querySelectorAll("body *").length).toBe(1);
      }),
    );
  });
});
