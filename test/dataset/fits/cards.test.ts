import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { parseCard } from "../../../src/dataset/fits/cards.ts";
import { cardLines, real } from "../../../src/dataset/fits/write-header.ts";

const parse = (text: string) => parseCard(text.padEnd(80));

describe("parseCard", () => {
  // FITS Standard 4.0, section 4.2: the fixed formats.
  it("reads fixed-format logicals, integers, reals and strings", () => {
    expect(parse("SIMPLE  =                    T / conforms")).toEqual({
      keyword: "SIMPLE",
      value: true,
      comment: "conforms",
    });
    expect(parse("BITPIX  =                  -32")).toMatchObject({ value: -32 });
    expect(parse("CRVAL4  =    1.42001400000E+09 /")).toMatchObject({ value: 1.420014e9, comment: "" });
    expect(parse("CTYPE3  = 'STOKES  '           / axis")).toMatchObject({
      value: "STOKES",
      comment: "axis",
    });
  });

  it("reads free format: values anywhere after the sign", () => {
    expect(parse("BITPIX  = -32/tight")).toMatchObject({ value: -32, comment: "tight" });
    expect(parse("GROUPS  = T")).toMatchObject({ value: true });
    expect(parse("OBJECT  =      'far right'")).toMatchObject({ value: "far right" });
  });

  it("reads D exponents, and numbers that begin with a point", () => {
    expect(parse("GSTIA0  =    .12744245567230401D+03")).toMatchObject({ value: 127.44245567230401 });
    expect(parse("X       = -1.5d-3")).toMatchObject({ value: -0.0015 });
  });

  it("undoubles quotes, keeps leading blanks and drops trailing ones", () => {
    expect(parse("OBJECT  = '  O''Hara''s  '")).toMatchObject({ value: "  O'Hara's" });
    expect(parse("OBJECT  = ''")).toMatchObject({ value: "" });
    expect(parse("OBJECT  = 'a / b' / c")).toMatchObject({ value: "a / b", comment: "c" });
  });

  it("reads complex values", () => {
    expect(parse("Z       = (1.5, -2D1) / pair")).toEqual({
      keyword: "Z",
      value: { complex: [1.5, -20] },
      comment: "pair",
    });
  });

  it("takes commentary for what it is, even with an equals sign in it", () => {
    expect(parse("COMMENT = is this a value?")).toMatchObject({
      keyword: "COMMENT",
      comment: "= is this a value?",
    });
    expect(parse("HISTORY scaled by X = 3")).toMatchObject({ keyword: "HISTORY", value: undefined });
    expect(parse("        = 3")).toMatchObject({ keyword: "" });
  });

  it("reads a keyword in lower case and one whose sign is followed by no blank", () => {
    expect(parse("object  = 'x'")).toMatchObject({ keyword: "OBJECT", value: "x" });
    expect(parse("GCOUNT  =7956")).toMatchObject({ keyword: "GCOUNT", value: 7956 });
  });

  it("tells a keyword without value from one with an empty string", () => {
    expect(parse("OBJECT  =")).toMatchObject({ value: null });
    expect(parse("OBJECT  = / nothing")).toMatchObject({ value: null });
  });

  it.each([
    "= 'open string",
    "= 12abc",
    "= 1.2.3",
    "= (1, two)",
    "= (1, 2",
    "= NaN",
    "= Infinity",
    "= 0x10",
    "= TRUE",
  ])("calls %j malformed, and does not throw", (rest) => {
    expect(parse(`BAD     ${rest}`).value).toHaveProperty("malformed");
  });

  it("gives a card for any 80 bytes", () => {
    const byte = fc.integer({ min: 0, max: 255 }).map((code) => String.fromCharCode(code));
    fc.assert(
      fc.property(fc.array(byte, { minLength: 80, maxLength: 80 }), (characters) => {
        expect(parseCard(characters.join(""))).toHaveProperty("keyword");
      }),
    );
  });

  it("reads every double back as it was written", () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (value) => {
        const [line] = cardLines({ keyword: "X", value: real(value) });
        expect(line).toHaveLength(80);
        expect(parseCard(line!).value).toBe(value === 0 ? 0 : value);
      }),
    );
  });

  it("reads every printable string back as it was written, but for trailing blanks", () => {
    fc.assert(
      fc.property(fc.string({ maxLength: 60 }), (text) => {
        const [line] = cardLines({ keyword: "X", value: text.replaceAll("'", "'") });
        fc.pre(line!.length === 80 && text.replaceAll("'", "''").length <= 68);
        expect(parseCard(line!).value).toBe(text.replace(/ +$/, ""));
      }),
    );
  });
});
