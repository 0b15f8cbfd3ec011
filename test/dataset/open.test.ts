import { mkdirSync, mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { dirname, join } from "node:path";
import { afterAll, describe, expect, it } from "vitest";
import { binaryTable, card, headerBlocks } from "../../src/dataset/fits/write.ts";
import { datasetName } from "../../src/dataset/name.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { fileMaker, groupFile } from "./group-file.ts";
import { idiFile } from "./idi-file.ts";
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

  it("tells FITS-IDI by the names of its tables, and asks for the one with the visibilities", async () => {
    const dataset = await openDataset(file(idiFile(), "night 12.dat"));
    expect([dataset.format, dataset.rows, dataset.bytes]).toEqual(["fits-idi", 4, idiFile().length]);
    const idi = primary(card("NAXIS", 0), card("GROUPS", true), card("GCOUNT", 0), card("PCOUNT", 0));
    expect(await refusal(Buffer.concat([idi, table("ARRAY_GEOMETRY")]), "a.idifits")).toMatch(
      /a\.idifits, HDU 1 \(primary\): no table is called UV_DATA: expected one, or several, with the visibilities\./,
    );
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
      "no visibilities: expected random groups (NAXIS1 = 0 and GROUPS = T) or a table UV_DATA, found an image of 30 x 20, a binary table " +
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
    ["night12.idifits", "night12"],
    ["plain", "plain"],
    [".fits", ".fits"],
  ])("of %s is %s", (path, name) => {
    expect(datasetName(path)).toBe(name);
  });
});

describe("openDataset of a folder or a glob", () => {
  const folder = mkdtempSync(join(tmpdir(), "open-"));
  afterAll(() => rmSync(folder, { recursive: true }));
  const put = (name: string, bytes: Uint8Array | string) => {
    const path = join(folder, name);
    mkdirSync(dirname(path), { recursive: true });
    writeFileSync(path, bytes);
    return path;
  };
  const image = () =>
    Buffer.concat([
      primary(card("NAXIS", 2), card("NAXIS1", 8), card("NAXIS2", 45), card("BUNIT", "K")),
      Buffer.alloc(2880),
    ]);

  it("takes the visibilities in it and names what it leaves out", async () => {
    put("night/one.uvfits", groupFile());
    put("night/map.fits", image());
    put("night/log.txt", "began at dusk");
    put("night/empty.fits", "");
    const dataset = await openDataset(join(folder, "night"));
    expect([dataset.rows, dataset.name]).toEqual([4, "one"]);
    expect(dataset.notes.at(-1)).toMatchObject({
      code: "files-left-out",
      text: "not visibilities and left out: empty.fits, log.txt, map.fits",
    });
  });

  it("refuses a folder without visibilities, and says what it found", async () => {
    put("none/log.txt", "began at dusk");
    put("none/map.fits", image());
    expect(await lineOfError(openDataset(join(folder, "none/*")))).toMatch(
      /none\/\*: none of the 2 files there holds visibilities: found log.txt, map.fits\. visvet reads/,
    );
  });

  it("refuses files of different kinds, and says which differs how", async () => {
    const idi = primary(card("NAXIS", 0), card("GROUPS", true), card("GCOUNT", 0), card("PCOUNT", 0));
    put("mixed/a.uvfits", groupFile());
    put("mixed/b.fits", Buffer.concat([idi, table("ARRAY_GEOMETRY")]));
    expect(await lineOfError(openDataset(join(folder, "mixed")))).toMatch(
      /b.fits: this is FITS-IDI, and a.uvfits is random-groups FITS: expected one kind/,
    );
  });

  it("passes on what is wrong with a damaged file there", async () => {
    put("damaged/a.uvfits", groupFile());
    put("damaged/b.uvfits", groupFile().subarray(0, 4000));
    expect(await lineOfError(openDataset(join(folder, "damaged")))).toMatch(/b.uvfits/);
  });

  it("does not leave out a file that was named", async () => {
    const log = put("list/log.txt", "began at dusk");
    expect(await lineOfError(openDataset([put("list/a.uvfits", groupFile()), log]))).toMatch(
      /log.txt: this file holds no visibilities/,
    );
  });
});
