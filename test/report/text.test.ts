import { describe, expect, it } from "vitest";
import { displayWidth } from "../../src/report/text/width.ts";
import { writeText } from "../../src/report/text.ts";
import { cleanCheck, emptyCheck, faultyCheck, HOSTILE, hostileCheck } from "./fixtures.ts";

const plain = { width: 80, colour: false };

/** Chalk's own sequences, and nothing else that begins with an escape. */
// biome-ignore lint/suspicious/noControlCharactersInRegex: escapes are what is looked for
const COLOURS = /\u001b\[\d+m/g;

function widest(text: string): number {
  return Math.max(...text.split("\n").map(displayWidth));
}

describe("the text report", () => {
  it("reads as it did when somebody last looked at it: a hold, at 80 columns", async () => {
    await expect(writeText(faultyCheck(), plain)).toMatchFileSnapshot("snapshots/faulty-80.txt");
  });

  it("reads as it did when somebody last looked at it: clean data, at 140 columns", async () => {
    const text = writeText(cleanCheck(), { width: 140, colour: false });
    await expect(text).toMatchFileSnapshot("snapshots/clean-140.txt");
  });

  it("begins with the verdict, what to do and the score before and after the flags", () => {
    const [first, ...rest] = writeText(faultyCheck(), plain).split("\n");
    expect(first).toBe("HOLD: quillon-night12");
    const head = rest.slice(0, 5).join(" ").replaceAll(/ +/g, " ");
    expect(head).toContain("Do not image it yet");
    expect(head).toContain("Score 46 of 100; 68 of 100 with the suggested flags applied.");
  });

  it("has its parts in the order in which a reader needs them", () => {
    const text = writeText(faultyCheck(), plain);
    const heads = text.split("\n").filter((line) => /^[A-Z]/.test(line));
    expect(heads).toEqual([
      "HOLD: quillon-night12",
      "What limits this image",
      "Findings",
      "Suggested flags",
      "Settings for the imaging run",
      "The plan it was judged against",
      "The numbers",
      "What visvet could not see",
      "Noticed in the file",
      "Rules that are not ours",
    ]);
  });

  it("says that flags are proposals and that nothing was changed", () => {
    const words = writeText(faultyCheck(), plain).replaceAll(/\s+/g, " ");
    expect(words).toContain("The flags are proposals for a person to accept or refuse.");
    expect(words).toContain("the dataset has not been changed");
  });

  it("says the same with colour as without", () => {
    const coloured = writeText(faultyCheck(), { width: 80, colour: true });
    expect(coloured).toMatch(COLOURS);
    expect(coloured.replaceAll(COLOURS, "")).toBe(writeText(faultyCheck(), plain));
  });

  it("is the same text for the same check", () => {
    expect(writeText(faultyCheck(), plain)).toBe(writeText(faultyCheck(), plain));
  });

  it.each([40, 57, 80, 100, 140, 200])("has no line wider than %i columns", (width) => {
    for (const check of [faultyCheck(), cleanCheck(), emptyCheck()]) {
      expect(widest(writeText(check, { width, colour: false }))).toBeLessThanOrEqual(width);
    }
  });

  it.each(Object.entries(HOSTILE))("is not widened, coloured or moved by names (%s)", (_, name) => {
    const text = writeText(hostileCheck(name), plain);
    expect(widest(text)).toBeLessThanOrEqual(80);
    expect(text).not.toMatch(/[\p{Cf}\p{Cs}\p{Zl}\p{Zp}]/u);
    expect(text.replaceAll("\n", "")).not.toMatch(/\p{Cc}/u);
  });

  it("takes a width that is no number for 80 columns, and never less than 40", () => {
    expect(writeText(faultyCheck(), { width: Number.NaN, colour: false })).toBe(
      writeText(faultyCheck(), plain),
    );
    const narrowest = writeText(faultyCheck(), { width: 40, colour: false });
    expect(writeText(faultyCheck(), { width: 3, colour: false })).toBe(narrowest);
  });

  it("says what is unknown of a dataset with nothing in it, and prints no NaN", () => {
    const text = writeText(emptyCheck(), plain);
    expect(text).toContain("no integration with a time");
    expect(text).toContain("Score unknown of 100");
    expect(text).not.toMatch(/NaN|undefined|null|Infinity/);
  });
});
