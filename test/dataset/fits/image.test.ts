import { describe, expect, it } from "vitest";
import { openFits } from "../../../src/dataset/fits/hdus.ts";
import { imageLayout, readImage } from "../../../src/dataset/fits/image.ts";
import { bigEndian, binaryTable, card, headerBlocks, real } from "../../../src/dataset/fits/write.ts";
import { memoryCursor, memorySource } from "./memory-cursor.ts";

type Cards = Parameters<typeof headerBlocks>[0];

async function imageOf(bitpix: number, data: Uint8Array, cards: Cards = [], elements = 6) {
  const header = headerBlocks([
    card("SIMPLE", true),
    card("BITPIX", bitpix),
    card("NAXIS", 2),
    card("NAXIS1", 3),
    card("NAXIS2", 2),
    ...cards,
  ]);
  const file = Buffer.concat([header, data, Buffer.alloc(2880 - data.length)]);
  const layout = imageLayout((await openFits(memorySource(file))).hdus[0]);
  const values = new Float64Array(elements);
  await readImage(memoryCursor(file), layout, 6 - elements, values);
  return { layout, values: [...values] };
}

describe("readImage", () => {
  const numbers = [0, 1, 2, 3, 4, 5];

  it.each([
    [8, bigEndian(Uint8Array.from(numbers))],
    [16, bigEndian(Int16Array.from(numbers))],
    [32, bigEndian(Int32Array.from(numbers))],
    [64, bigEndian(BigInt64Array.from(numbers, BigInt))],
    [-32, bigEndian(Float32Array.from(numbers))],
    [-64, bigEndian(Float64Array.from(numbers))],
  ])("reads BITPIX %i", async (bitpix, bytes) => {
    expect((await imageOf(bitpix, bytes)).values).toEqual(numbers);
  });

  it("scales, and gives NaN for BLANK", async () => {
    const cards = [card("BSCALE", real(0.5)), card("BZERO", real(10)), card("BLANK", 3)];
    const { values } = await imageOf(16, bigEndian(Int16Array.from(numbers)), cards);
    expect(values).toEqual([10, 10.5, 11, Number.NaN, 12, 12.5]);
  });

  // FITS Standard 4.0, section 4.4.2.5: BLANK shall not be used with floating point.
  it("passes over BLANK in floating point", async () => {
    const { values } = await imageOf(-32, bigEndian(Float32Array.from(numbers)), [card("BLANK", 3)]);
    expect(values).toEqual(numbers);
  });

  it("reads a run from anywhere, and no further than the array goes", async () => {
    const bytes = bigEndian(Float32Array.from(numbers));
    expect((await imageOf(-32, bytes, [], 2)).values).toEqual([4, 5]);
    await expect(imageOf(-32, bytes, [], 7)).rejects.toThrow("elements -1 to 6 of 6");
  });

  it("gives the axes, the first fastest", async () => {
    const { layout } = await imageOf(-32, bigEndian(Float32Array.from(numbers)));
    expect([layout.axes, layout.elements]).toEqual([[3, 2], 6]);
  });

  it("refuses a table", async () => {
    const primary = headerBlocks([card("SIMPLE", true), card("BITPIX", 8), card("NAXIS", 0)]);
    const table = binaryTable({ name: "T", columns: [{ name: "A", form: "1J", cells: [1] }] });
    const { hdus } = await openFits(memorySource(Buffer.concat([primary, table])));
    expect(() => imageLayout(hdus[1]!)).toThrow("this is a binary table: expected an image");
    expect(imageLayout(hdus[0]).elements).toBe(0);
  });
});
