import { mkdtemp, readdir, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, afterEach, beforeAll, describe, expect, it, vi } from "vitest";
import yargs from "yargs";
import { simulate } from "../../src/cli/simulate.ts";
import { InputError } from "../../src/util/errors.ts";

const SCENARIO = `name: small
array:
  name: Larkfield Array
  latitude: -31.2deg
  longitude: 116.4deg
  layout: { kind: ring, antennas: 4, radius: 200m }
time: { start: 2026-03-01T12:00:00, duration: 1min, integration: 10s }
frequency: { start: 1.4GHz, channels: 4, width: 500kHz }
fields:
  - { name: Heron, ra: 8h30m, dec: -28d30m00s }
sky:
  - { flux: 1Jy }
faults:
  - { kind: silent-antenna, antenna: 3 }
`;

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-simulate-"));
  await writeFile(join(folder, "small.yaml"), SCENARIO);
});
afterEach(() => vi.restoreAllMocks());
afterAll(() => rm(folder, { recursive: true, force: true }));

/** What the command prints. */
async function run(...words: readonly string[]): Promise<string> {
  let printed = "";
  vi.spyOn(process.stdout, "write").mockImplementation((text) => {
    printed += String(text);
    return true;
  });
  await yargs([...words])
    .command(simulate)
    .strict()
    .exitProcess(false)
    .fail((message, error) => {
      throw error ?? new Error(message);
    })
    .parseAsync();
  return printed;
}

describe("visvet simulate", () => {
  it("writes the dataset and the truth beside it, and says so", async () => {
    const out = join(folder, "night.uvfits");
    const printed = await run("simulate", join(folder, "small.yaml"), "--out", out);
    expect(printed).toBe(
      `Wrote ${out}: 36 rows, 288 samples, 28.8 kB\nWrote ${join(folder, "night.truth.json")}: 1 fault\n`,
    );
    expect((await readdir(folder)).sort()).toEqual(["night.truth.json", "night.uvfits", "small.yaml"]);
  });

  it("refuses to overwrite, and to go without a place to write", async () => {
    const out = join(folder, "night.uvfits");
    await expect(run("simulate", join(folder, "small.yaml"), "--out", out)).rejects.toThrow(InputError);
    await expect(run("simulate", join(folder, "small.yaml"))).rejects.toThrow(/out/);
  });
});
