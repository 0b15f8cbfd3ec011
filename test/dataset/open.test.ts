import { describe, expect, it } from "vitest";
import { binaryTable, card, headerBlocks } from "../../src/dataset/fits/write.ts";
import { datasetName } from "../../src/dataset/name.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { fileMaker, groupFile } from "./group-file.ts";
import { lineOfError } from "./read-all.ts";

const file = fileMaker();
const refusal = (bytes: Uint8Array, name?: string) => lineOfError(openDataset(file(bytes, name)));
const primary = (...cards: Parameters<typeof headerBlocks>[0]) =>
  headerBlocks([card("SIMPLE", true), card("BITPIX", 8), ...cards]);
const table = (name: string) => binaryTable({ name, columns: [{ name: "A", form: "1J", cells: [1] }] });

describe("openDataset", () => {
  it("tells random groups by what is in the file, whatever it is called", async () => {
    const dataset = await openDataset(file(groupFile(), "night 12.dat"));
    expect([dataset.format, dataset.rows]).toEqual(["random-groups", 4]);
    expect(dataset.bytes).toBe(groupFile().length);
  });

  it("says that FITS-IDI is not read yet, and what to do", async () => {
    const idi = primary(card("NAXIS", 0), card("GROUPS", true), card("GCOUNT", 0), card("PCOUNT", 0));
    expect(await refusal(Buffer.concat([idi, table("ARRAY_GEOMETRY")]), "a.idifits")).toMatch(
      /a\.idifits, HDU 1 \(primary\): this is a FITS-IDI file: this version reads random groups only\. Export the data/,
    );
    expect(await refusal(Buffer.concat([idi, table("OTHER"), table("UV_DATA")]))).toContain("FITS-IDI");
  });

  it("knows the archive form whose visibilities are in a table", async () => {
    const archive = primary(card("NAXIS", 2), card("NAXIS1", 777777701), card("NAXIS2", 0));
    expect(await refusal(archive)).toContain("the visibilities of this archive file are in a binary table");
  });

  it("says what a FITS file without visibilities holds", async () => {
    const image = Buffer.concat([
      primary(card("NAXIS", 2), card("NAXIS1", 30), card("NAXIS2", 20)),
      Buffer.alloc(2880),
      table("CATALOG"),
    ]);
    expect(await refusal(image)).toContain(
      "no visibilities: expected random groups (NAXIS1 = 0 and GROUPS = T), found an image of 30 x 20, a binary table " +
        "CATALOG. Name the file of visibilities, not an image or a table made from them",
    );
    const groups = Buffer.concat([
      primary(card("NAXIS", 1), card("NAXIS1", 30), card("GROUPS", true)),
      Buffer.alloc(2880),
    ]);
    expect(await refusal(groups)).toContain("The header says GROUPS = T, but NAXIS1 is not 0");
  });

  it("refuses what is no FITS file, an empty file, a missing file", async () => {
    expect(await refusal(Buffer.from("time,u,v,w\n1,2,3,4\n"))).toContain("this is not a FITS file");
    expect(await refusal(Buffer.alloc(0))).toContain("the file is empty");
    expect(await lineOfError(openDataset("nowhere.uvfits"))).toBe(
      "nowhere.uvfits: there is no such file. Check the spelling and the folder",
    );
  });
});

describe("datasetName", () => {
  it.each([
    ["/data/night12.uvfits", "night12"],
    ["night12.uvfits.gz", "night12"],
    ["a.b.FITS", "a.b"],
    ["plain", "plain"],
    [".fits", ".fits"],
  ])("of %s is %s", (path, name) => {
    expect(datasetName(path)).toBe(name);
  });
});
