import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { MOST_HEADER_BYTES, readHeader } from "../../../src/dataset/fits/header.ts";
import { type CardToWrite, card, headerBlocks, real } from "../../../src/dataset/fits/write.ts";
import { lineOfError } from "../read-all.ts";
import { memoryCursor } from "./memory-cursor.ts";

const place = { file: "made.fits", part: "HDU 1" };

async function headerOf(bytes: Uint8Array, start = 0) {
  return (await readHeader(memoryCursor(bytes), start, place)).header;
}

const cards = (...lines: string[]) =>
  Buffer.from(
    lines
      .map((line) => line.padEnd(80))
      .join("")
      .padEnd(2880),
  );

describe("readHeader", () => {
  it("reads cards over several blocks, to the block after END", async () => {
    const many: CardToWrite[] = Array.from({ length: 40 }, (_, i) => card(`KEY${i}`, i));
    const bytes = headerBlocks(many);
    const { header, end } = await readHeader(memoryCursor(bytes), 0, place);
    expect(end).toBe(5760);
    expect(header.integer("KEY39", 0)).toBe(39);
    expect(header.byteOf("KEY39")).toBe(39 * 80);
  });

  it("joins a string over CONTINUE cards", async () => {
    const text = `It's ${"long ".repeat(60)}end`;
    const header = await headerOf(headerBlocks([card("OBJECT", text), card("AFTER", 1)]));
    expect(header.text("OBJECT")).toBe(text);
    expect(header.integer("AFTER", 0)).toBe(1);
  });

  it("reads any string of printable characters back, however long", async () => {
    await fc.assert(
      fc.asyncProperty(fc.string({ maxLength: 400 }), async (text) => {
        const header = await headerOf(headerBlocks([card("OBJECT", text)]));
        expect(header.text("OBJECT")).toBe(text.replace(/ +$/, ""));
      }),
    );
  });

  it("keeps an ampersand that no CONTINUE follows", async () => {
    const header = await headerOf(cards("A       = 'this & that&'", "B       = 'x&'", "END"));
    expect(header.text("A")).toBe("this & that&");
    expect(header.text("B")).toBe("x&");
  });

  it("takes the first of a keyword's values and names those that differ", async () => {
    const header = await headerOf(cards("A       = 1", "B       = 2", "A       = 3", "B       = 2", "END"));
    expect(header.integer("A", 0)).toBe(1);
    expect(header.contradictions).toEqual(["A"]);
  });

  it("refuses a file that ends before END", async () => {
    expect(await lineOfError(headerOf(cards("A       = 1")))).toBe(
      "made.fits, HDU 1, byte 2880: the file ends at byte 2880, inside a header: expected a card that says END. " +
        "The copy is probably incomplete: compare its size with the original and copy it again",
    );
    expect(await lineOfError(headerOf(cards("A       = 1").subarray(0, 100)))).toContain(
      "the file ends at byte 100, inside a header",
    );
  });

  it("accepts a last block that ends right after END", async () => {
    expect((await headerOf(cards("A       = 1", "END").subarray(0, 160))).integer("A", 0)).toBe(1);
  });

  it("names the byte where text gives way to data", async () => {
    const block = cards("A       = 1");
    block[160] = 0x80;
    expect(await lineOfError(headerOf(block))).toContain(
      "byte 160: found bytes that are no text where a header card should start",
    );
  });

  it("stops after a bounded number of bytes when END never comes", async () => {
    const endless = {
      read: async (into: Uint8Array) => {
        into.fill(0x20);
        return into.length;
      },
      reach: async (at: number) => at,
      close: async () => {},
    };
    const line = await lineOfError(readHeader(endless, 0, place));
    expect(line).toContain(`no END in the first ${MOST_HEADER_BYTES} bytes`);
  });

  it("joins tens of thousands of CONTINUE cards in time that grows with their number", async () => {
    const lines = [
      "A       = 'x&'",
      ...Array(30_000).fill("CONTINUE  'yyyyyyyyyyyyyyyyyyyyyyyyyyyyyyyy&'"),
      "END",
    ];
    const text = lines.map((line) => line.padEnd(80)).join("");
    const header = await headerOf(Buffer.from(text.padEnd(Math.ceil(text.length / 2880) * 2880)));
    expect(header.text("A")).toHaveLength(1 + 30_000 * 32 + 1);
  });
});

describe("Header", () => {
  const made = () =>
    headerOf(
      headerBlocks([
        card("I", 7),
        card("F", real(2.5)),
        card("S", "text"),
        card("T", true),
        card("N", " 2000.0"),
        card("NEG", -1),
      ]),
    );

  it("gives undefined for what is missing", async () => {
    const header = await made();
    expect(header.number("NONE")).toBeUndefined();
    expect(header.text("NONE")).toBeUndefined();
    expect(header.integer("NONE", 0)).toBeUndefined();
    expect(header.logical("NONE")).toBeUndefined();
    expect(() => header.requiredInteger("NONE", 0)).toThrow("NONE is missing: expected a whole number");
  });

  it("refuses values of the wrong kind, naming keyword, value and what was expected", async () => {
    const header = await made();
    expect(() => header.number("S")).toThrow("S is text: expected a number");
    expect(() => header.text("I")).toThrow("I is 7: expected a string in quotes");
    expect(() => header.logical("I")).toThrow("I is 7: expected T or F");
    expect(() => header.integer("F", 0)).toThrow("F is 2.5: expected a whole number of 0 or more");
    expect(() => header.integer("NEG", 0, 9)).toThrow("NEG is -1: expected a whole number from 0 to 9");
  });

  it("shows any value as text and reads a number in quotes where that is asked for", async () => {
    const header = await made();
    expect(["I", "F", "S", "T"].map((key) => header.shown(key))).toEqual(["7", "2.5", "text", "T"]);
    expect(header.looseNumber("N")).toBe(2000);
    expect(header.looseNumber("S")).toBeUndefined();
  });
});
