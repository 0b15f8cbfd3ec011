import { mkdtemp, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import fc from "fast-check";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { parsePlan, readPlan } from "../../src/dataset/plan-file.ts";
import { InputError } from "../../src/util/errors.ts";

const ARCSEC = Math.PI / 180 / 3600;

function lineOf(text: string): string {
  try {
    parsePlan(text, "plan.yaml");
  } catch (error) {
    if (error instanceof InputError) return error.line;
    throw error;
  }
  throw new Error("the plan was accepted");
}

describe("parsePlan", () => {
  it("reads every key with its unit", () => {
    const text = `
# a deep field
field_of_view: 30arcmin
resolution: 5 arcsec
largest_scale: 4'
target_rms: 20uJy/beam
dynamic_range: 5000
dish_diameter: 25m
weighting: robust(-0.5)
corrects_w: no
purpose: line
line_channels: "0:14-28,1:3"
expected_sefd: 420 Jy
`;
    const plan = parsePlan(text, "plan.yaml");
    expect(plan.fieldOfView).toBeCloseTo(1800 * ARCSEC, 12);
    expect(plan.resolution).toBeCloseTo(5 * ARCSEC, 14);
    expect(plan.largestScale).toBeCloseTo(240 * ARCSEC, 12);
    expect(plan.targetRms).toBeCloseTo(20e-6, 12);
    expect(plan.dynamicRange).toBe(5000);
    expect(plan.dishDiameter).toBe(25);
    expect(plan.weighting).toEqual({ kind: "robust", robust: -0.5 });
    expect(plan.correctsW).toBe(false);
    expect(plan.purpose).toBe("line");
    expect(plan.lineChannels).toEqual([
      { subband: 0, channels: [14, 28] },
      { subband: 1, channels: [3, 3] },
    ]);
    expect(plan.expectedSefd).toBe(420);
  });

  it("asks for nothing when the file is empty or only comments", () => {
    expect(parsePlan("", "plan.yaml")).toEqual({});
    expect(parsePlan("# nothing yet\n", "plan.yaml")).toEqual({});
  });

  it("takes line channels as a list and unquoted", () => {
    const ranges = [
      { subband: 0, channels: [14, 28] },
      { subband: 1, channels: [3, 3] },
    ];
    expect(parsePlan("line_channels: 0:14-28,1:3", "p").lineChannels).toEqual(ranges);
    expect(parsePlan('line_channels: ["0:14-28", "1:3"]', "p").lineChannels).toEqual(ranges);
  });

  it("takes true and false as well as yes and no", () => {
    expect(parsePlan("corrects_w: yes", "p").correctsW).toBe(true);
    expect(parsePlan("corrects_w: true", "p").correctsW).toBe(true);
    expect(parsePlan("corrects_w: False", "p").correctsW).toBe(false);
  });

  it.each([
    [
      "feild_of_view: 1deg",
      'plan.yaml, line 1, column 1: unknown key "feild_of_view": did you mean "field_of_view"?',
    ],
    [
      "resolution: 5arcsec\nresolution: 6arcsec",
      "plan.yaml, line 2, column 1: this is not YAML: Map keys must be unique. Write one key: value a line",
    ],
    [
      "resolution: 5",
      'plan.yaml, line 1, column 13: resolution: "5" has no unit. Write an angle with its unit, such as "30arcmin"',
    ],
    [
      "weighting: briggs",
      'plan.yaml, line 1, column 12: weighting: unknown weighting "briggs". Write natural, uniform or robust(R) with R from -5 to 5, such as robust(0.5)',
    ],
    [
      "\n\npurpose: contiuum",
      'line 3, column 10: purpose: unknown purpose "contiuum": did you mean continuum?',
    ],
    ["resolution: 5parsec", 'unknown unit "parsec" in "5parsec": did you mean "arcsec"?'],
    ["resolution: -5arcsec", "-5arcsec is out of range"],
    ["field_of_view: 200deg", "200deg is out of range"],
    ["dynamic_range: many", '"many" is not a dynamic range'],
    ["dynamic_range: 0.5", '"0.5" is not a dynamic range'],
    ["line_channels: 0:9-3", '"0:9-3" runs backwards'],
    ["line_channels: 14-28", '"14-28" names no channels'],
    ["corrects_w: maybe", '"maybe" is neither yes nor no'],
    ["resolution:", "resolution has no value"],
    ["resolution: [1arcsec, 2arcsec]", "resolution wants one value"],
    ["- resolution", "a plan is a list of key: value lines"],
    ["resolution: 'unclosed", "this is not YAML"],
    ["__proto__: 1", 'unknown key "__proto__"'],
    [
      "resolution: 5arcmin\nfield_of_view: 1arcmin",
      "line 1, column 13: resolution is not smaller than field_of_view",
    ],
    [
      "resolution: 5arcmin\nlargest_scale: 1arcmin",
      "line 2, column 16: largest_scale is smaller than resolution",
    ],
  ])("refuses %j with the place and what to do", (text, message) => {
    expect(lineOf(text)).toContain(message);
  });

  it("answers any text with a plan or an error for the user", () => {
    const keys = fc.constantFrom(
      "field_of_view",
      "weighting",
      "line_channels",
      "dynamic_range",
      "x",
      "&a",
      "*a",
      "<<",
    );
    const line = fc.tuple(keys, fc.string()).map(([key, value]) => `${key}: ${value}`);
    fc.assert(
      fc.property(fc.array(fc.oneof(line, fc.string())), (parts) => {
        try {
          parsePlan(parts.join("\n"), "plan.yaml");
        } catch (error) {
          if (!(error instanceof InputError)) throw error;
          expect(error.place.file).toBe("plan.yaml");
        }
      }),
    );
  });
});

describe("readPlan", () => {
  let folder: string;
  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), "plan-"));
  });
  afterAll(() => rm(folder, { recursive: true }));

  it("reads a file", async () => {
    const path = join(folder, "good.yaml");
    await writeFile(path, "resolution: 1arcsec\n");
    expect((await readPlan(path)).resolution).toBeCloseTo(ARCSEC, 14);
  });

  it("names a file that is not there", async () => {
    await expect(readPlan(join(folder, "none.yaml"))).rejects.toThrow(/the plan cannot be read/);
    await expect(readPlan(folder)).rejects.toThrow(InputError);
  });

  it("refuses a file that is too large or not text", async () => {
    const large = join(folder, "large.yaml");
    await writeFile(large, Buffer.alloc(2 ** 20 + 1, "#"));
    await expect(readPlan(large)).rejects.toThrow("the plan is larger than 1 MB");
    const binary = join(folder, "binary.yaml");
    await writeFile(binary, Buffer.from([0xff, 0xfe, 0x00, 0xc3]));
    await expect(readPlan(binary)).rejects.toThrow("not UTF-8 text");
  });
});
