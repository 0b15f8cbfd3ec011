import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, describe, expect, it } from "vitest";
import { bigEndian, card, dataPadding, headerBlocks, real } from "../../src/dataset/fits/write.ts";
import { MOST_PIXELS, readSkyImage } from "../../src/triage/image/sky-image.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-"));
afterAll(() => rmSync(folder, { recursive: true }));

type Cards = Readonly<Record<string, string | number>>;

const SKY: Cards = {
  CTYPE1: "RA---SIN",
  CTYPE2: "DEC--SIN",
  CRVAL1: 127.5,
  CRVAL2: -28,
  CDELT1: -0.01,
  CDELT2: 0.01,
  CRPIX1: 11,
  CRPIX2: 11,
};

/** A file of one image; pixel i has the value i + 1. */
function file(axes: readonly number[], cards: Cards): string {
  const count = axes.reduce((product, length) => product * length, 1);
  const data = bigEndian(Float32Array.from({ length: count }, (_, i) => i + 1));
  const header = headerBlocks([
    card("SIMPLE", true),
    card("BITPIX", -32),
    card("NAXIS", axes.length),
    ...axes.map((length, i) => card(`NAXIS${i + 1}`, length)),
    ...Object.entries(cards).map(([key, value]) =>
      card(key, typeof value === "number" && !Number.isInteger(value) ? real(value) : value),
    ),
  ]);
  const path = join(folder, `image-${Math.abs(hash(JSON.stringify([axes, cards])))}.fits`);
  writeFileSync(path, Buffer.concat([header, data, dataPadding(data.length)]));
  return path;
}

function hash(text: string): number {
  return Array.from(text).reduce((sum, character) => (sum * 31 + character.charCodeAt(0)) | 0, 7);
}

describe("readSkyImage", () => {
  it("takes the first plane of other axes, and says so", async () => {
    const image = await readSkyImage(
      file([20, 20, 3], { ...SKY, CTYPE3: "FREQ", CRVAL3: 1.4e9, CDELT3: 1e6, CRPIX3: 1 }),
    );
    expect([image.width, image.height, image.pixels[0], image.pixels[399]]).toEqual([20, 20, 1, 400]);
    expect(image.notes.join(" ")).toContain("Of the 3 planes of axis 3 (FREQ) the first is looked at.");
    expect(image.plane).toEqual({ low: 1.3995e9, high: 1.4005e9 });
  });

  it("finds the celestial axes wherever they are", async () => {
    const cards = {
      CTYPE1: "STOKES",
      CRVAL1: 1,
      CTYPE2: "DEC--SIN",
      CRVAL2: -28,
      CDELT2: 0.01,
      CTYPE3: "RA---SIN",
      CRVAL3: 127.5,
      CDELT3: -0.01,
    };
    const image = await readSkyImage(file([2, 20, 24], cards));
    expect([image.width, image.height]).toEqual([24, 20]);
    // Stokes fastest, then declination: a step in right ascension passes over 40 numbers.
    expect([image.pixels[0], image.pixels[1], image.pixels[24]]).toEqual([1, 41, 3]);
  });

  it("reads another projection where it moves no pixel, and refuses it where it does", async () => {
    const tangent = { ...SKY, CTYPE1: "RA---TAN", CTYPE2: "DEC--TAN" };
    expect((await readSkyImage(file([20, 20], tangent))).notes.join(" ")).toContain(
      "TAN projection is read as SIN",
    );
    const wide = { ...tangent, CDELT1: -1.5, CDELT2: 1.5 };
    await expect(readSkyImage(file([20, 20], wide))).rejects.toThrow(
      /TAN projection puts the corner of the image/,
    );
  });

  it.each([
    [
      "a projection of another kind",
      { ...SKY, CTYPE1: "RA---CAR", CTYPE2: "DEC--CAR" },
      /CTYPE1 is RA---CAR: expected one of/,
    ],
    [
      "no size of a pixel",
      { CTYPE1: "RA---SIN", CTYPE2: "DEC--SIN", CRVAL1: 1, CRVAL2: 1 },
      /size of a pixel is unknown/,
    ],
    ["a slanted projection", { ...SKY, PV2_1: 0.2 }, /PV2_1 is 0.2: a slanted projection is not read/],
    ["a turned pole", { ...SKY, LONPOLE: 170 }, /LONPOLE is 170: expected 180/],
    ["galactic axes", { ...SKY, CTYPE1: "GLON-SIN", CTYPE2: "GLAT-SIN" }, /no axis of right ascension/],
    ["an unknown unit", { ...SKY, CUNIT1: "furlong" }, /CUNIT1 is furlong: expected an angle/],
  ])("refuses %s", async (_, cards, message) => {
    await expect(readSkyImage(file([20, 20], cards as Cards))).rejects.toThrow(message);
  });

  it("refuses an image of a few pixels", async () => {
    await expect(readSkyImage(file([8, 8], SKY))).rejects.toThrow(
      "the image is 8 x 8 pixels: expected 16 or more",
    );
  });

  it("looks at the middle of a large image, and says so", async () => {
    const image = await readSkyImage(
      file([MOST_PIXELS + 200, 20], { ...SKY, CDELT1: -0.001, CDELT2: 0.001, CRPIX1: 700 }),
    );
    expect([image.width, image.height, image.corner[0]]).toEqual([MOST_PIXELS, 20, 187]);
    expect(image.notes.join(" ")).toContain("sources outside them are not seen");
  });
});
