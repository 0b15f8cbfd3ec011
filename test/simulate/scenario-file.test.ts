import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { parseScenario, readScenario } from "../../src/simulate/scenario-file.ts";
import { simulate } from "../../src/simulate/simulate.ts";
import { InputError } from "../../src/util/errors.ts";

const GOOD = `name: test
array:
  name: Larkfield Array
  latitude: -31.2deg
  longitude: 116.4deg
  layout: { kind: ring, antennas: 5, radius: 200m }
time: { start: 2026-03-01T12:00:00, duration: 1min, integration: 10s }
frequency: { start: 1.4GHz, channels: 4, width: 500kHz }
fields:
  - { name: Heron, ra: 8h30m, dec: -28d30m00s }
sky:
  - { flux: 300mJy, east: 2arcmin }
faults:
  - { kind: silent-antenna, antenna: 3 }
  - { kind: burst, channels: "1-2", time: [10s, 30s], amplitude: 8 sigma }
`;

/** The one line that a person sees for `GOOD` with something replaced. */
function complaint(from: string, to: string): string {
  expect(GOOD).toContain(from);
  try {
    const file = parseScenario(GOOD.replace(from, to), "s.yaml");
    try {
      simulate(file.scenario);
    } catch (error) {
      throw file.located(error);
    }
  } catch (error) {
    if (error instanceof InputError) return error.line;
    throw error;
  }
  throw new Error("nothing was wrong");
}

describe("a scenario file", () => {
  it("gives numbers in SI units, with defaults filled in", () => {
    const { scenario } = parseScenario(GOOD, "s.yaml");
    expect(scenario.array.latitude).toBeCloseTo((-31.2 * Math.PI) / 180, 14);
    expect(scenario.fields[0]!.ra).toBeCloseTo((8.5 * Math.PI) / 12, 14);
    expect(scenario.fields[0]!.dec).toBeCloseTo((-28.5 * Math.PI) / 180, 14);
    expect(scenario.sky[0]!.flux).toBe(0.3);
    expect(scenario.frequency.width).toBe(500e3);
    expect(scenario.faults[1]).toMatchObject({
      channels: [[1, 2]],
      time: [10, 30],
      amplitude: { value: 8, unit: "sigma" },
    });
    expect(scenario.polarizations).toEqual(["RR", "LL"]);
    expect(scenario.noise).toBe(1);
  });

  it.each([
    // a misspelt key, kind or word
    [
      "duration: 1min",
      "durration: 1min",
      's.yaml, line 7, column 37: time: unknown key "durration": did you mean "duration"?',
    ],
    [
      "kind: silent-antenna",
      "kind: silent-antena",
      's.yaml, line 14, column 13: faults.0.kind: unknown kind "silent-antena": did you mean "silent-antenna"?',
    ],
    [
      "kind: ring",
      "kind: rings",
      's.yaml, line 6, column 19: array.layout.kind: unknown kind "rings": did you mean "ring"?',
    ],
    // a value of the wrong sort
    ["width: 500kHz", "width: 500", "s.yaml, line 8, column 49: frequency.width: expected a frequency"],
    ["width: 500kHz", "width: 500kHerz", 's.yaml, line 8, column 49: frequency.width: unknown unit "kHerz"'],
    [
      "latitude: -31.2deg",
      "latitude: -91deg",
      "s.yaml, line 4, column 13: array.latitude: lies between -90deg and 90deg",
    ],
    ["amplitude: 8 sigma", "amplitude: loud", "s.yaml, line 15, column 66: faults.1.amplitude:"],
    ["8 sigma", "-3Jy", "s.yaml, line 15, column 66: faults.1.amplitude:"],
    [
      'channels: "1-2"',
      'channels: "2-1"',
      "s.yaml, line 15, column 30: faults.1.channels: a channel range runs from low to high",
    ],
    [
      "east: 2arcmin",
      "east: 80deg, north: 80deg",
      "s.yaml, line 12, column 5: sky.0: the source lies beyond the sky",
    ],
    ["antennas: 5", "antennas: 2", "s.yaml, line 6, column 35: array.layout.antennas:"],
    // something left out
    ["  name: Larkfield Array\n", "", "s.yaml, line 3, column 3: array.name: a value is missing here"],
    // contradictions found on working it out
    [
      "antenna: 3",
      "antenna: 7",
      "s.yaml, line 14, column 5: faults.0: there is no antenna 7: the numbers are 1, 2, 3, 4, 5",
    ],
    ['"1-2"', '"1-4"', "s.yaml, line 15, column 30: faults.1.channels: channel 4 is past the last, 3"],
    [
      "[10s, 30s]",
      "[5min, 6min]",
      "s.yaml, line 15, column 5: faults.1: no integration lies in the fault's time and fields",
    ],
    [
      "start: 2026-03-01T12:00:00",
      "start: yesterday",
      's.yaml, line 7, column 16: time.start: "yesterday" is not a date and time',
    ],
    [
      "duration: 1min",
      "duration: 5s",
      "s.yaml, line 7, column 7: time: no integration of 10 s fits into 5 s",
    ],
    [
      "longitude: 116.4deg",
      'longitude: 116.4deg\n  sefds: { "9": 3Jy }',
      "s.yaml, line 6, column 10: array.sefds.9: there is no antenna 9",
    ],
    // sizes that would take all memory
    [
      "duration: 1min",
      "duration: 9999d",
      "s.yaml, line 7, column 7: time: more than 1048576 integrations of 10 s",
    ],
    [
      "channels: 4",
      "channels: 65536, subbands: 64",
      "s.yaml, line 8, column 12: frequency: 8388608 samples in a row",
    ],
    // not YAML, or YAML that could hurt
    ["layout: {", "layout: {{", "s.yaml, line"],
    ["name: test", "name: &a test", "s.yaml, line 1, column 10: an anchor is not used here"],
  ])("with %s -> %s is refused at its place", (from, to, expected) => {
    expect(complaint(from, to)).toContain(expected);
  });

  it("counts what else is wrong", () => {
    const twice = GOOD.replace("duration: 1min", "durration: 1min");
    expect(() => parseScenario(twice, "s.yaml")).toThrow(InputError);
    expect(complaint("duration: 1min", "durration: 1min")).toContain("1 more place is wrong too");
  });

  it.each(["", "[]", "42", "null", "name: x"])("of %j is refused", (text) => {
    expect(() => parseScenario(text, "s.yaml")).toThrow(InputError);
  });
});

describe("reading a scenario", () => {
  let folder: string;
  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), "visvet-scenario-"));
  });
  afterAll(() => rm(folder, { recursive: true, force: true }));

  it("refuses a file that is missing, too large or no text", async () => {
    await expect(readScenario(join(folder, "none.yaml"))).rejects.toThrow(/cannot be read/);
    await writeFile(join(folder, "large.yaml"), Buffer.alloc((1 << 20) + 1, 0x20));
    await expect(readScenario(join(folder, "large.yaml"))).rejects.toThrow(/larger than 1 MB/);
    await writeFile(join(folder, "binary.yaml"), Buffer.from([0xff, 0xfe, 0x00]));
    await expect(readScenario(join(folder, "binary.yaml"))).rejects.toThrow(/not UTF-8/);
    await expect(readScenario(folder)).rejects.toThrow(InputError);
  });
});
