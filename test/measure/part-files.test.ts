import { mkdtemp, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { finishSurvey } from "../../src/measure/finish-survey.ts";
import { gatherParts, identityOf, isMade, joinPartFiles, makePart } from "../../src/measure/part-files.ts";
import { surveyPart } from "../../src/measure/survey.ts";
import { writeUvfits } from "../../src/simulate/write-uvfits.ts";
import { InputError } from "../../src/util/errors.ts";
import { simulated } from "../support/scenarios.ts";
import { surveyBits } from "./survey-bits.ts";

const SMALL = {
  time: { duration: "2min" },
  array: { layout: { kind: "spiral", antennas: 5, inner: "40m", radius: "1km", relief: "2m" } },
  frequency: { channels: 6 },
} as const;

let folder: string;
let dataset: Dataset;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-parts-"));
  await writeUvfits(simulated(SMALL).dataset, join(folder, "night.uvfits"));
  dataset = await openDataset(join(folder, "night.uvfits"));
});
afterAll(() => rm(folder, { recursive: true, force: true }));

const MEMORY = 1e9;

function requestOf(index: number, of: number, memory = MEMORY) {
  return { index, of, memory, named: dataset.files, columnMap: null, field: null, tool: "visvet test" };
}

/** @returns the paths */
async function partsOf(of: number, name: string, memory = MEMORY): Promise<string[]> {
  const paths: string[] = [];
  for (let index = 0; index < of; index++) {
    const path = join(folder, `${name}-${index}.part`);
    await makePart(dataset, await identityOf(dataset, requestOf(index, of, memory)), path);
    paths.push(path);
  }
  return paths;
}

describe("parts in files", () => {
  it.each([1, 2, 7])("come to the survey of the whole, to the last bit: %i of them", async (of) => {
    const paths = await partsOf(of, `of${of}`);
    const joined = await joinPartFiles(await gatherParts(paths.reverse()), dataset);
    expect(surveyBits(finishSurvey(joined))).toEqual(surveyBits(finishSurvey(await surveyPart(dataset))));
  });

  it("may be without a row, where there are more parts than rows", async () => {
    const path = join(folder, "empty.part");
    const identity = await identityOf(dataset, requestOf(1, 1000));
    expect(identity.firstRow).toBe(identity.endRow);
    await makePart(dataset, identity, path);
    expect(await isMade(path, identity, dataset)).toBe(true);
  });

  it("are the same bytes when made again, and known to be there", async () => {
    const [path] = await partsOf(2, "again");
    const before = await readFile(path!);
    const identity = await identityOf(dataset, requestOf(0, 2));
    expect(await isMade(path!, identity, dataset)).toBe(true);
    expect(await isMade(path!, await identityOf(dataset, requestOf(1, 2)), dataset)).toBe(false);
    expect(await isMade(path!, await identityOf(dataset, requestOf(0, 2, 2e9)), dataset)).toBe(false);
    await makePart(dataset, identity, path!);
    expect((await readFile(path!)).equals(before)).toBe(true);
    await writeFile(path!, before.subarray(0, before.length - 1));
    expect(await isMade(path!, identity, dataset)).toBe(false);
  });

  it("are asked for by number when some are missing, and named when one is there twice", async () => {
    const paths = await partsOf(9, "missing");
    const some = paths.filter((_, i) => ![0, 3, 4, 5, 8].includes(i));
    await expect(gatherParts(some)).rejects.toThrow(
      "of 9 parts, numbered from 0, these are missing: 0, 3-5, 8",
    );
    const twice = gatherParts([...paths, paths[2]!]);
    await expect(twice).rejects.toThrow(`this is part 2, and so is ${paths[2]}`);
    await expect(gatherParts([])).rejects.toThrow("no part is named");
  });

  it("of other settings or of another dataset are refused, and so is a dataset that has changed", async () => {
    const paths = await partsOf(2, "mine");
    const [, other] = await partsOf(2, "other-memory", 2e9);
    await expect(gatherParts([paths[0]!, other!])).rejects.toThrow(
      /its memory is 2000000000 bytes, and that of/,
    );
    const set = await gatherParts(paths);
    const changed = join(folder, "changed");
    await writeUvfits(simulated({ ...SMALL, seed: 5 }).dataset, `${changed}.uvfits`);
    const second = await openDataset(`${changed}.uvfits`);
    await expect(joinPartFiles(set, second)).rejects.toThrow(
      /the dataset's name is changed now, and was night/,
    );
    const sameName = { ...second, name: dataset.name };
    await expect(joinPartFiles(set, sameName)).rejects.toThrow(/the dataset's content is [0-9a-f]{12} now/);
  });
});

describe("a damaged part", () => {
  let good: Buffer;
  let path: string;
  beforeAll(async () => {
    path = (await partsOf(1, "good"))[0]!;
    good = await readFile(path);
  });

  async function attempt(bytes: Uint8Array): Promise<unknown> {
    const bad = join(folder, "bad.part");
    await writeFile(bad, bytes);
    return gatherParts([bad])
      .then((set) => joinPartFiles(set, dataset))
      .then(
        () => null,
        (error: unknown) => error,
      );
  }

  it("is refused wherever it is cut, with its file and what to do", async () => {
    for (const length of [0, 7, 8, 31, 32, 100, 1000, good.length - 33, good.length - 1]) {
      const error = await attempt(good.subarray(0, length));
      expect(error, `cut at ${length}`).toBeInstanceOf(InputError);
      expect((error as InputError).line).toMatch(/bad\.part.*(make the part again|Name the files)/);
    }
    expect(await attempt(Buffer.concat([good, Buffer.alloc(8)]))).toBeInstanceOf(InputError);
  });

  it("is refused when any bit of it has turned", async () => {
    for (let i = 0; i < 60; i++) {
      const bytes = Buffer.from(good);
      const at = i < 40 ? i : Math.floor((bytes.length * (i * 0.618)) % bytes.length);
      bytes[at]! ^= 1 << (i % 8);
      expect(await attempt(bytes), `byte ${at}`).toBeInstanceOf(InputError);
    }
  });

  it.each([
    [
      "something else",
      Buffer.from("SIMPLE  =                    T / not a part at all"),
      /this is no part of a survey/,
    ],
    ["an empty file", Buffer.alloc(0), /ends at byte 0/],
    ["zeros", Buffer.alloc(4096), /this is no part of a survey/],
  ])("that is %s is told so", async (_, bytes, said) => {
    expect((await attempt(bytes)) as InputError).toMatchObject({ message: expect.stringMatching(said) });
  });

  it("of another version is told so", async () => {
    const bytes = Buffer.from(good);
    bytes.writeUInt32LE(77, 8);
    expect(await attempt(bytes)).toMatchObject({
      message: "the part is of version 77: this program reads 1",
    });
  });

  it("that is not there, or a folder, is told so", async () => {
    await expect(gatherParts([join(folder, "nowhere.part")])).rejects.toThrow("there is no such file");
    await expect(gatherParts([folder])).rejects.toThrow(/not a regular file|cannot be read/);
  });
});
