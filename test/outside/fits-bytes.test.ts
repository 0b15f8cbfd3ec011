/** Bytes, codes and number spacings against the check values of fits-check-values.json, each with its provenance. */
import { describe, expect, it } from "vitest";
import { bigEndian, card, groupsBytes, real } from "../../src/dataset/fits/write.ts";
import { padding } from "../../src/dataset/fits/write-header.ts";
import { type BaselineCode, decodeBaseline } from "../../src/dataset/fits-rows/baselines.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { dateFromMjd, MJD_EPOCH_JD, mjdFromDate } from "../../src/util/dates.ts";
import {
  antennaTable,
  COMPLEX,
  fileMaker,
  freq,
  groupFile,
  plainSpec,
  stokes,
} from "../dataset/group-file.ts";
import { readAll } from "../dataset/read-all.ts";
import { stored } from "../support/fresh.ts";

interface Entry {
  id: string;
  group: string;
  inputs: Record<string, unknown>;
  expected: unknown;
  tolerance: { abs?: number; rel?: number };
}
const { entries } = stored<{ entries: Entry[] }>("fits-check-values");
const starting = (start: string) => entries.filter(({ id }) => id.startsWith(start));
const entry = (id: string) => entries.find((one) => one.id === id)!;
const file = fileMaker();

describe("sizes of groups", () => {
  it.each(starting("groups-size"))("$id", ({ inputs, expected }) => {
    const { BITPIX, PCOUNT, GCOUNT, axes } = inputs as {
      BITPIX: -32;
      PCOUNT: number;
      GCOUNT: number;
      axes: number[];
    };
    const bytes = groupsBytes({
      bitpix: BITPIX,
      groups: GCOUNT,
      axes: axes.map((length) => ({ type: "X", length, value: 0, step: 0 })),
      parameters: Array(PCOUNT).fill({ name: "X" }),
    });
    expect({ data_bytes: bytes, padded_bytes: bytes + padding(bytes) }).toEqual(expected);
  });
});

describe("BASELINE codes", () => {
  it.each(starting("baseline-"))("$id", ({ inputs, expected }) => {
    const code: BaselineCode = { antenna1: 0, antenna2: 0, subarray: 0 };
    const { a1, a2, subarray } = expected as Record<string, number>;
    // Both as written and as float32 keeps them.
    for (const value of [inputs.BASELINE as number, Math.fround(inputs.BASELINE as number)]) {
      expect(decodeBaseline(value, code)).toBe(true);
      expect(code).toEqual({ antenna1: a1, antenna2: a2, subarray });
    }
  });

  it("above 65536 keep their sub-array fraction only to the spacing of float32", () => {
    const { inputs, expected } = entry("float32-2048-code-spacing");
    expect(spacing(inputs.value as number)).toBe(expected);
    const code: BaselineCode = { antenna1: 0, antenna2: 0, subarray: 0 };
    expect(decodeBaseline(Math.fround(71687.01), code)).toBe(true);
    expect(code).toEqual({ antenna1: 3, antenna2: 7, subarray: 2 });
  });
});

/** From the float32 nearest to `value` to the next. */
function spacing(value: number): number {
  const bits = new Uint32Array(Float32Array.of(value).buffer);
  bits[0]! += 1;
  return new Float32Array(bits.buffer)[0]! - Math.fround(value);
}

describe("number formats", () => {
  it("f32-bytes", () => {
    const { inputs, expected } = entry("f32-bytes");
    const bytes = bigEndian(Float32Array.from(inputs.value as (number | string)[], Number));
    const hex = Buffer.from(bytes).toString("hex").toUpperCase();
    expect(hex.match(/.{8}/g)).toEqual(expected);
  });

  it("float32-date-spacing: one float32 Julian date is good to a quarter of a day", () => {
    const { inputs, expected } = entry("float32-date-spacing");
    expect(spacing(inputs.value as number)).toBe(expected);
  });

  it("float32-dayfraction-spacing: a float32 day fraction is good to 5 ms", async () => {
    const { inputs, expected } = entry("float32-dayfraction-spacing");
    const fraction = inputs.value as number;
    expect(spacing(fraction) * 86400).toBeCloseTo(expected as number, 8);
    const date2 = { name: "DATE", stored: () => fraction };
    const { time } = await readAll(
      await openDataset(file(groupFile({ parameters: [...plainSpec.parameters.slice(0, 5), date2] }))),
    );
    expect(Math.abs(time[0]! - 60476 - fraction) * 86400).toBeLessThan((expected as number) / 2 + 1e-6);
  });
});

describe("axes", () => {
  it.each([
    ["freq-axis", 1, 4],
    ["freq-axis-crpix", 33, 1],
  ])("%s", async (id, pixel, channels) => {
    const { inputs, expected, tolerance } = entry(id);
    const axis = { ...freq(channels, inputs.CRVAL as number, inputs.CDELT as number), pixel };
    expect(inputs.CRPIX).toBe(pixel);
    const dataset = await openDataset(
      file(groupFile({ axes: [COMPLEX, stokes(1), axis], tables: [antennaTable()] })),
    );
    const found = dataset.setups[0]!.frequencies[inputs.channel_index_from_0 as number]!;
    expect(Math.abs(found - (expected as number))).toBeLessThanOrEqual(tolerance.abs!);
  });

  it("uvw-seconds: wavelengths at the reference frequency times PSCAL are seconds", async () => {
    const { inputs, expected } = entry("uvw-seconds");
    const uu = { name: "UU--", scale: inputs.PSCAL as number, stored: () => inputs.stored as number };
    const spec = { parameters: [uu, ...plainSpec.parameters.slice(1)], cards: [card("EPOCH", real(1950))] };
    const { u } = await readAll(await openDataset(file(groupFile(spec))));
    const { seconds, metres, wavelengths } = expected as Record<string, number>;
    expect(u[0]! / seconds!).toBeCloseTo(1, 9);
    expect((u[0]! * 299792458) / metres!).toBeCloseTo(1, 9);
    expect((u[0]! * (inputs.freq_hz as number)) / wavelengths!).toBeCloseTo(1, 9);
  });
});

describe("dates", () => {
  it.each(starting("jd-"))("$id", ({ inputs, expected }) => {
    const mjd = (expected as number) - MJD_EPOCH_JD;
    expect(mjdFromDate(inputs.date as string)).toBe(mjd);
    expect(dateFromMjd(mjd)).toBe(inputs.date);
  });
});
