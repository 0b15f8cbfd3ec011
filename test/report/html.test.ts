import { parseHTML } from "linkedom";
import { describe, expect, it } from "vitest";
import { writeHtml } from "../../src/report/html.ts";
import { cleanCheck, emptyCheck, faultyCheck, HOSTILE, hostileCheck } from "./fixtures.ts";

const page = writeHtml(faultyCheck());
const { document } = parseHTML(page);

const texts = (selector: string) =>
  [...document.querySelectorAll(selector)].map((element) => element.textContent!.trim());

describe("the page", () => {
  it("is the same bytes for the same check", () => {
    expect(writeHtml(faultyCheck()) === page).toBe(true);
  });

  it("is smaller than 1.5 MB", () => {
    expect(Buffer.byteLength(page)).toBeLessThan(1_500_000);
  });

  it("forbids everything but its own styles and pictures, and holds no script", () => {
    const policy = document
      .querySelector('meta[http-equiv="Content-Security-Policy"]')!
      .getAttribute("content");
    expect(policy).toBe(
      "default-src &#39;none&#39;; style-src &#39;unsafe-inline&#39;; img-src data:; base-uri &#39;none&#39;; form-action &#39;none&#39;".replaceAll(
        "&#39;",
        "'",
      ),
    );
    expect(document.querySelectorAll("script, iframe, object, embed, form, link, base").length).toBe(0);
    expect(page.match(/\son\w+=/gi) ?? []).toEqual([]);
  });

  it("names nothing outside itself", () => {
    const outside = [...document.querySelectorAll("[href], [src]")]
      .map((element) => element.getAttribute("href") ?? element.getAttribute("src")!)
      .filter((target) => !target.startsWith("#") && !target.startsWith("data:image/png;base64,"));
    expect(outside).toEqual([]);
    expect(page.match(/url\((?!#)[^)]*\)/g) ?? []).toEqual([]);
  });

  it("puts the verdict and the flags first", () => {
    expect(document.querySelector("main")!.firstElementChild!.className).toBe("verdict hold");
    expect(texts("main h2").slice(0, 3)).toEqual(["Suggested flags", "What limits this image", "Findings"]);
    expect(document.querySelector(".verdict")!.textContent).toContain("Do not image it yet");
  });

  it("says each verdict by word beside its shape", () => {
    expect(texts(".tag")).toEqual(["Hold", "Caution", "Caution", "Caution", "Caution"]);
    expect(document.querySelectorAll(".tag svg[aria-hidden=true]").length).toBe(5);
  });

  it("links to headings that are there, and no id stands twice", () => {
    const ids = [...document.querySelectorAll("[id]")].map((element) => element.id);
    expect(new Set(ids).size).toBe(ids.length);
    for (const link of document.querySelectorAll('a[href^="#"]')) {
      expect(ids).toContain(link.getAttribute("href")!.slice(1));
    }
    for (const [, id] of page.matchAll(/url\(#([^)]+)\)/g)) expect(ids).toContain(id);
    for (const element of document.querySelectorAll("[aria-labelledby]")) {
      expect(ids).toContain(element.getAttribute("aria-labelledby"));
    }
  });

  it("has every plot that the data give, each with a label and its content in words", () => {
    expect(texts("figure h3")).toEqual([
      "uv coverage",
      "Dirty beam",
      "Amplitude against uv distance",
      "|w| against uv distance",
      "Amplitude against channel",
      "Flagged samples by antenna",
      "Flagged samples by channel",
      "Phase against time, antenna Q07",
    ]);
    for (const figure of document.querySelectorAll("figure")) {
      expect(figure.querySelector("svg")!.getAttribute("aria-label")!.length).toBeGreaterThan(10);
      expect(figure.querySelector("figcaption")!.textContent!.length).toBeGreaterThan(30);
    }
  });

  it("gives every table a caption, and its heads a scope", () => {
    for (const table of document.querySelectorAll("table")) {
      expect(table.querySelector("caption")!.textContent!.length).toBeGreaterThan(3);
      for (const head of table.querySelectorAll("th"))
        expect(head.getAttribute("scope")).toMatch(/^(row|col)$/);
    }
  });

  it("shows clean data as ready, without flags and without an arrow to them", () => {
    const clean = parseHTML(writeHtml(cleanCheck())).document;
    expect(clean.querySelector(".verdict-word")!.textContent!.trim()).toBe("Ready");
    expect(clean.querySelector("#flags")!.parentElement!.textContent).toContain("None are suggested.");
    expect(clean.querySelectorAll(".score-head dd").length).toBe(1);
  });

  it("shows a dataset with nothing in it, and prints no NaN", () => {
    const empty = writeHtml(emptyCheck());
    expect(empty).toContain("There is nothing to plot");
    expect(empty.replace(/<style>.*<\/style>/s, "").match(/.{20}(?:NaN|undefined|Infinity)/g) ?? []).toEqual(
      [],
    );
  });

  it.each(Object.entries(HOSTILE))(
    "shows hostile names as text and lets none of them act (%s)",
    (_, name) => {
      const text = writeHtml(hostileCheck(name));
      const hostile = parseHTML(text).document;
      expect(hostile.querySelectorAll("script, img, iframe").length).toBe(0);
      expect(
        [...hostile.querySelectorAll("*")].flatMap((element) => element.getAttributeNames()),
      ).not.toContain("onerror");
      expect(text.replaceAll("\n", "").match(/[\p{Cc}\p{Cf}]/gu) ?? []).toEqual([]);
      expect(hostile.querySelectorAll("figure").length).toBe(8);
      expect(hostile.querySelectorAll("main > section").length).toBe(
        document.querySelectorAll("main > section").length,
      );
    },
  );
});
