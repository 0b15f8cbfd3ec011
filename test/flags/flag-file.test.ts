import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { parseFlagFile, readFlagFile } from "../../src/flags/flag-file.ts";
import { InputError } from "../../src/util/errors.ts";

const ENTRY = {
  id: "F1",
  rule: "burst",
  reason: "seen",
  antennas: [7],
  baselines: null,
  time: [60000.25, 60000.5],
  subbands: [1],
  channels: [[40, 44]],
  polarizations: ["XX"],
  fields: null,
  samples: 12,
  fraction: 0.001,
  confidence: 0.9,
  cost: {
    sensitivityLossFraction: 0.0005,
    beamMajorChangeFraction: null,
    beamMinorChangeFraction: null,
    peakSidelobeChangeFraction: null,
    largestGapChangeFraction: null,
  },
};
const FILE = { format: "visvet-flags", version: 1, dataset: "night12", entries: [ENTRY] };

function without(key: string): object {
  return { ...FILE, entries: [Object.fromEntries(Object.entries(ENTRY).filter(([name]) => name !== key))] };
}

const entry = (changes: object) => ({ ...FILE, entries: [ENTRY, { ...ENTRY, ...changes }] });

function lineOf(value: unknown): string {
  try {
    parseFlagFile(typeof value === "string" ? value : JSON.stringify(value), "flags.json");
  } catch (error) {
    if (error instanceof InputError) return error.line;
    throw error;
  }
  throw new Error("it was let through");
}

describe("parseFlagFile", () => {
  it("reads entries, what was not computed as NaN", () => {
    const { entries, dataset } = parseFlagFile(JSON.stringify(FILE), "flags.json");
    expect(dataset).toBe("night12");
    expect(entries[0]).toMatchObject({ antennas: [7], time: [60000.25, 60000.5], channels: [[40, 44]] });
    expect(entries[0]!.cost.sensitivityLossFraction).toBe(0.0005);
    expect(entries[0]!.cost.beamMajorChangeFraction).toBeNaN();
  });

  it("lets keys pass that a later version 1 may add", () => {
    expect(parseFlagFile(JSON.stringify({ ...FILE, note: "x" }), "f").entries).toHaveLength(1);
  });

  it.each([
    ["nothing", "", "not JSON"],
    ["half a file", JSON.stringify(FILE).slice(0, 90), "not JSON"],
    ["another format", { ...FILE, format: "flags" }, 'its format is not "visvet-flags"'],
    ["a list", [FILE], "not a file of flags"],
    ["another version", { ...FILE, version: 2 }, "flags of version 2: expected 1"],
    [
      "a part left out, which would select everything",
      without("antennas"),
      "entry 1 (F1): antennas is missing. Every key is there, null for all",
    ],
    ["a part misspelt", { ...FILE, entries: [{ ...without("antennas"), antenas: [7] }] }, "is missing"],
    ["an antenna that is no number", entry({ antennas: ["7"] }), "flags.json, entry 2 (F1): antennas.0:"],
    ["a fraction of a channel", entry({ channels: [[0.5, 2]] }), "channels.0.0:"],
    ["channels the wrong way round", entry({ channels: [[5, 2]] }), "entry 2 (F1): channels from 5 to 2"],
    ["times the wrong way round", entry({ time: [2, 1] }), "time from 2 to 1"],
    ["a time of three", entry({ time: [1, 2, 3] }), "time"],
    ["an unknown polarization", entry({ polarizations: ["QQ"] }), "polarizations.0"],
    ["a negative sub-band", entry({ subbands: [-1] }), "subbands.0"],
    ["entries that are no list", { ...FILE, entries: { length: 1e9 } }, "entries:"],
    ["a time out of all numbers", JSON.stringify(entry({})).replace("60000.25", "1e999"), "time.0"],
  ])("refuses %s and says where", (_, value, expected) => {
    expect(lineOf(value)).toContain(expected);
  });

  it("does not let a text touch what objects inherit", () => {
    const text = JSON.stringify(FILE).replace('"night12"', '"night12","__proto__":{"polluted":true}');
    parseFlagFile(text, "f");
    expect((Object.prototype as { polluted?: boolean }).polluted).toBeUndefined();
  });

  it("either reads or refuses with a line, whatever is written", () => {
    fc.assert(
      fc.property(fc.jsonValue(), fc.constantFrom(...Object.keys(ENTRY)), (value, key) => {
        const text = JSON.stringify(entry({ [key]: value }));
        try {
          parseFlagFile(text, "f");
        } catch (error) {
          expect(error).toBeInstanceOf(InputError);
        }
      }),
      { numRuns: 500 },
    );
  });
});

describe("readFlagFile", () => {
  it("reads a file, and says when there is none", async () => {
    const folder = await mkdtemp(join(tmpdir(), "flags-"));
    try {
      await writeFile(join(folder, "flags.json"), JSON.stringify(FILE));
      expect((await readFlagFile(join(folder, "flags.json"))).entries).toHaveLength(1);
      await expect(readFlagFile(join(folder, "none.json"))).rejects.toThrow("no such file");
    } finally {
      await rm(folder, { recursive: true });
    }
  });
});
