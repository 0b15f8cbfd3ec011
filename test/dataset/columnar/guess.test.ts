import { readFileSync, rmSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { afterAll, describe, expect, it } from "vitest";
import { parseColumnMap } from "../../../src/dataset/columnar/map-file.ts";
import { columnMapText } from "../../../src/dataset/columnar/map-text.ts";
import { openColumnar } from "../../../src/dataset/columnar/open.ts";
import { saveColumnMap } from "../../../src/dataset/columnar/save-map.ts";
import { readAll } from "../../support/read-all.ts";
import { lineOfError } from "../read-all.ts";
import { csvOf, folder, gridSamples, HEADER, tableFile } from "./table-text.ts";

afterAll(() => rmSync(folder, { recursive: true, force: true }));

const SPEED_OF_LIGHT = 299_792_458;

/** One row of one sample, its header and cells by name. */
function oneRow(cells: Readonly<Record<string, string | number>>): string {
  return `${Object.keys(cells).join(",")}\n${Object.values(cells).join(",")}\n`;
}
const PLAIN = {
  mjd: 60_000.5,
  antenna1: 1,
  antenna2: 2,
  u_m: 30,
  v_m: 40,
  w_m: 5,
  freq_GHz: 1.4,
  pol: "XX",
  real: 1,
  imag: 2,
};

describe("What columns hold, guessed from their names", () => {
  it("is shown, unit by unit", async () => {
    const dataset = await openColumnar([tableFile(csvOf(gridSamples(3, 1, 2)))]);
    const note = dataset.notes.find(({ code }) => code === "columns-guessed")!.text;
    expect(note).toContain('time is "mjd" in mjd');
    expect(note).toContain('u is "u_m" in m');
    expect(note).toContain('frequency is "freq_MHz" in MHz');
    expect(dataset.setups[0]!.frequencies).toEqual(Float64Array.of(1.4e9, 1.401e9));
    expect(dataset.setups[0]!.channelWidths).toEqual(Float64Array.of(1e6));
  });

  // MJD of 2026-04-17T10:00:30: 61147 + 36030 s / 86400 s (MJD 40587 is 1970-01-01).
  const TIME = 61_147 + 36_030 / 86_400;
  it.each([
    ["mjd", TIME],
    ["time", TIME],
    ["jd", TIME + 2_400_000.5],
    ["time", TIME + 2_400_000.5],
    ["unix_time", (61_147 - 40_587) * 86_400 + 36_030],
    ["time", (61_147 - 40_587) * 86_400 + 36_030],
    ["time", TIME * 86_400],
    ["utc", "2026-04-17T10:00:30"],
    ["Time", "2026-04-17 10:00:30Z"],
    ["timestamp", "2026-04-17T12:00:30+02:00"],
  ])("tells a time in a column called %s: %s", async (name, value) => {
    const { mjd: _, ...rest } = PLAIN;
    const all = await readAll(await openColumnar([tableFile(oneRow({ [name]: value, ...rest }))]));
    expect(Math.abs(all.time[0]! - TIME) * 86_400).toBeLessThan(1e-4);
  });

  it.each([
    ["u_m", 30, 30 / SPEED_OF_LIGHT],
    ["u (km)", 0.03, 30 / SPEED_OF_LIGHT],
    ["U_lambda", 140, 140 / 1.4e9],
    ["uu_klambda", 0.14, 140 / 1.4e9],
    ["u_ns", 100, 1e-7],
    ["u", 1e-7, 1e-7],
  ])("tells the unit of %s", async (name, value, seconds) => {
    const { u_m: _, v_m: _v, w_m: _w, ...rest } = PLAIN;
    const others = name === "u" ? { v: 2e-7, w: 0 } : { v_m: 40, w_m: 5 };
    const all = await readAll(await openColumnar([tableFile(oneRow({ ...rest, [name]: value, ...others }))]));
    expect(all.u[0]! / seconds).toBeCloseTo(1, 12);
  });

  it("asks for the unit of u, v, w where metres and wavelengths are both possible", async () => {
    const { u_m: _, ...rest } = PLAIN;
    const line = await lineOfError(openColumnar([tableFile(oneRow({ ...rest, u: 30 }))]));
    expect(line).toContain('column "u" (u) has no unit: its name and its values leave it open');
    expect(line).toContain("wavelengths");
  });

  it("asks which of two columns is meant", async () => {
    const line = await lineOfError(openColumnar([tableFile(oneRow({ ...PLAIN, ant1: 1 }))]));
    expect(line).toContain('"antenna1" and "ant1" might each be the antenna1');
  });

  it("names what is missing and the columns that are left", async () => {
    const { antenna2: _, ...rest } = PLAIN;
    const line = await lineOfError(openColumnar([tableFile(oneRow({ ...rest, baseline_end: 2 }))]));
    expect(line).toContain('no column is known to hold antenna2; columns not yet used: "baseline_end"');
  });

  it("takes names of antennas and fields, amplitude and phase, sigma and flags", async () => {
    const { antenna1: _1, antenna2: _2, real: _r, imag: _i, ...rest } = PLAIN;
    const row = { ...rest, station1: "North", station2: "East", source: "Heron", amp: 2, phase_deg: 90 };
    const text = oneRow({ ...row, sigma: 0.5, flagged: "true" });
    const dataset = await openColumnar([tableFile(text)]);
    expect(dataset.array.antennas.map(({ number, name }) => [number, name])).toEqual([
      [1, "East"],
      [2, "North"],
    ]);
    expect(dataset.fields).toMatchObject([{ id: 1, name: "Heron" }]);
    const all = await readAll(dataset);
    expect([all.antenna1[0], all.antenna2[0], all.field[0]]).toEqual([2, 1, 1]);
    expect(all.real[0]).toBeCloseTo(0, 6);
    expect(all.imag[0]).toBeCloseTo(2, 6);
    expect(all.weight[0]).toBe(-4);
  });

  it("takes FITS numbers of polarizations (FITS Standard 4.0, table 29)", async () => {
    const dataset = await openColumnar([tableFile(oneRow({ ...PLAIN, pol: -5 }))]);
    expect(dataset.polarizations).toEqual(["XX"]);
  });
});

describe("The column map in force", () => {
  const map = (more: string) =>
    `columns:\n  time: { column: mjd, unit: mjd }\n  antenna1: ant1\n  antenna2: ant2\n` +
    `  u: { column: u_m, unit: m }\n  v: { column: v_m, unit: m }\n  w: { column: w_m, unit: m }\n` +
    `  channel: channel\n  polarization: pol\n  real: real\n  imag: imag\n${more}`;

  it("is saved, and says the same when it is read", async () => {
    const table = csvOf(gridSamples(3, 2, 2));
    const guessed = await openColumnar([tableFile(table)]);
    const path = join(folder, "saved.yaml");
    await saveColumnMap(guessed, path);
    const read = await openColumnar([tableFile(table)], { columnMap: path });
    expect(read.columnMap).toEqual(guessed.columnMap);
    expect(read.notes.map(({ code }) => code)).not.toContain("columns-guessed");
    await expect(saveColumnMap(guessed, path)).rejects.toThrow("the file exists already");
    expect(parseColumnMap(readFileSync(path, "utf8"), path, folder).uses).toEqual(guessed.columnMap.uses);
  });

  it("is found beside the file, by its name or for its folder", async () => {
    const table = csvOf(gridSamples(3, 2, 2));
    const constants =
      "constants:\n  array: Reed Array\n  frequencies: { start: 2GHz, step: 2MHz, channels: 2 }\n";
    const path = tableFile(table);
    writeFileSync(path.replace(/csv$/, "columns.yaml"), map(constants));
    const dataset = await openColumnar([path]);
    expect(dataset.array.name).toBe("Reed Array");
    expect(dataset.setups[0]!.frequencies).toEqual(Float64Array.of(2e9, 2.002e9));
    // This map leaves the weights out.
    expect(dataset.hasWeights).toBe(false);
    expect((await readAll(dataset)).weight[0]).toBe(1);
  });

  it("may hold constants alone, and the columns are guessed", async () => {
    const path = tableFile(csvOf(gridSamples(3, 1, 2)), {
      map: "constants: { unit: Jy, integration: 10s }\n",
    });
    const dataset = await openColumnar([path]);
    expect(dataset.unit).toBe("Jy");
    expect((await readAll(dataset)).integration[0]).toBe(10);
  });

  it("takes antennas from a file of their own", async () => {
    writeFileSync(
      join(folder, "stations.csv"),
      "name,number,x,y,z,diameter\nA,1,1,2,3,12\nB,2,4,5,6,\nC,3,7,8,9,25\n",
    );
    const constants = "constants: { antenna_positions: stations.csv, dish_diameter: 13m }\n";
    const dataset = await openColumnar([tableFile(csvOf(gridSamples(3, 1, 2)), { map: constants })]);
    expect(dataset.array.frame).toBe("local");
    expect(dataset.array.antennas).toEqual([
      { number: 1, name: "A", position: [1, 2, 3], diameter: 12 },
      { number: 2, name: "B", position: [4, 5, 6], diameter: 13 },
      { number: 3, name: "C", position: [7, 8, 9], diameter: 25 },
    ]);
  });

  it.each([
    ["columns:\n  tme: mjd\n", 2, 3, 'columns: unknown key "tme": did you mean "time"?'],
    ["columns:\n  u: { column: u, unit: furlong }\n", 2, 6, 'unknown unit "furlong" of u'],
    ["columns:\n  time: { column: t, unit: s }\n", 2, 9, 'needs "since"'],
    ["columns:\n  u: [1]\n", 2, 6, "expected the name of a column"],
    ["constants:\n  polarizations: [RR, RX]\n", 2, 23, '"RX" is no polarization'],
    ["constants:\n  frequencies: [1.4Gz]\n", 2, 17, 'unknown unit "Gz"'],
    ["constants:\n  frequencies: [[1GHz, 2GHz], [3GHz]]\n", 2, 16, "different numbers of channels"],
    ["constants:\n  fields:\n    - { name: A, dec: 95deg }\n", 3, 23, "is no declination"],
    ["lists: [channels]\n", 1, 9, "expected subband, channel, polarization"],
    ["columns: {\n", 2, 1, "this is not YAML"],
  ])("is refused with line and column: %j", (text, line, column, message) => {
    try {
      parseColumnMap(text, "m.yaml", ".");
      expect.unreachable();
    } catch (error) {
      expect((error as { message: string }).message).toContain(message);
      expect((error as { place: unknown }).place).toMatchObject({ file: "m.yaml", line, column });
    }
  });

  it("keeps every number to its last digit", () => {
    const constants = {
      fields: [
        { id: 3, name: "A: b", rightAscension: 2.22529479629277, declination: -0.1 + 0.3, equinox: 2000 },
      ],
      antennas: [{ number: 1, name: "yes", position: [1 / 3, -2 / 3, 1e-9] as const, diameter: null }],
      setups: [{ id: 1, frequencies: [[1.4e9 + 1 / 3]], channelWidths: [1e6 / 3] }],
      referenceDay: 61_147,
      siderealTime: 205.13947995204003,
      header: { observer: "true", observed: "2026-04-17" },
    };
    const text = columnMapText({ uses: {}, lists: [], constants });
    expect(parseColumnMap(text, "m", ".").constants).toMatchObject(constants);
  });

  it("puts frequencies into the channels that it gives, falling ones too", async () => {
    const constants =
      "constants: { frequencies: [[1.403GHz, 1.402GHz, 1.401GHz, 1.4GHz]], channel_width: 1MHz }\n";
    const table = csvOf(gridSamples(3, 1, 4)).replaceAll(",channel,", ",other,");
    const dataset = await openColumnar([tableFile(table, { map: constants })]);
    expect(dataset.shape.channels).toBe(4);
    expect([...(await readAll(dataset)).real.subarray(0, 8)]).toEqual(
      [6, 7, 4, 5, 2, 3, 0, 1].map((i) => i + 0.25),
    );
    const off = table.replaceAll(",1402,", ",1402.6,").replaceAll(",1403,", ",1404,");
    expect(await lineOfError(openColumnar([tableFile(off, { map: constants })]))).toContain(
      "a row is at 1404000000 Hz, and no channel of the column map is within half its width of that",
    );
  });

  it("counts channels from 1 where the table does, and says so", async () => {
    const constants = "constants: { frequencies: { start: 1.4GHz, step: 1MHz, channels: 3 } }\n";
    const shifted = gridSamples(3, 1, 3).map((sample) => ({ ...sample, channel: sample.channel + 1 }));
    const dataset = await openColumnar([tableFile(csvOf(shifted), { map: constants })]);
    expect(dataset.notes.map(({ code }) => code)).toContain("counted-from-one");
    expect([...(await readAll(dataset)).real.subarray(0, 2)]).toEqual([0.25, 1.25]);
    const beyond = [...shifted, { ...shifted[0]!, channel: 4 }];
    expect(await lineOfError(openColumnar([tableFile(csvOf(beyond), { map: constants })]))).toContain(
      "channels run from 1 to 4: expected 1 to 3",
    );
  });

  it("that names a column which is not there is refused", async () => {
    const path = tableFile(`${HEADER}\n`, { map: map("  flag: bad\n") });
    expect(await lineOfError(openColumnar([path]))).toContain(
      'there is no column "bad", which the column map calls flag',
    );
  });
});
