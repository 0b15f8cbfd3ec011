/**
 * What `check` exports, read by programs that are not ours: measures by DuckDB, NumPy and Python's csv module, flags by
 * Astropy and fitsverify (exports.py).
 */
import { spawnSync } from "node:child_process";
import { mkdtempSync, rmSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { DuckDBInstance } from "@duckdb/node-api";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { openDataset } from "../../src/dataset/open.ts";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import { type Applied, applyFlags } from "../../src/flags/apply/apply.ts";
import type { FlagEntry } from "../../src/flags/entry.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import type { Survey } from "../../src/measure/survey-result.ts";
import { flagBytes, writeFlags } from "../../src/report/write-flags.ts";
import { measureTable, writeTables } from "../../src/report/write-tables.ts";
import { writeFitsIdi } from "../../src/simulate/write-fits-idi.ts";
import { writeUvfits } from "../../src/simulate/write-uvfits.ts";
import { pythonJson, systemTool } from "../support/require.ts";
import { simulated } from "../support/scenarios.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-exports-"));
afterAll(() => rmSync(folder, { recursive: true }));

const { dataset } = simulated({ time: { start: "2026-03-01T23:59:30", duration: "1min" } });
const cost = {
  sensitivityLossFraction: 0.01,
  beamMajorChangeFraction: Number.NaN,
  beamMinorChangeFraction: 0,
  peakSidelobeChangeFraction: 0,
  largestGapChangeFraction: 0,
};
const entry = (id: string, rule: string, parts: Partial<FlagEntry>): FlagEntry => ({
  ...EVERYTHING,
  id,
  rule,
  reason: "seen",
  samples: 1,
  fraction: 0.5,
  confidence: 0.9,
  cost,
  ...parts,
});

let survey: Survey;
let flags: FlagEntry[];
let applied: Applied;
beforeAll(async () => {
  survey = await surveyDataset(dataset);
  flags = [
    entry("F1", "silent-antenna", { antennas: [3, 5] }),
    entry("F2", "burst", {
      time: [survey.times[1]!, survey.times[3]!],
      channels: [
        [2, 4],
        [9, 9],
      ],
      fields: [1],
    }),
    entry("F3", "one-hand-off", { baselines: [[1, 2]], polarizations: [dataset.polarizations[1]!] }),
  ];
  const check = { dataset, flags, survey, measures: survey.measures };
  for (const format of ["csv", "parquet"] as const) await writeTables(check, folder, format);
  await writeFlags(check, folder, ["csv", "parquet", "idi"]);
  const original = join(folder, "original.uvfits");
  await writeUvfits(dataset, original);
  const opened = await openDataset(original);
  for (const [name, into] of [
    ["weights", "weights"],
    ["table", "flag-table"],
  ] as const) {
    const out = join(folder, `${name}.uvfits`);
    applied = await applyFlags({ dataset: opened, flags, out, into });
  }
});

describe("DuckDB", () => {
  /** Rows as lists, numbers as numbers. */
  async function query(sql: string): Promise<unknown[][]> {
    const instance = await DuckDBInstance.create(":memory:");
    const connection = await instance.connect();
    try {
      const rows = await (await connection.runAndReadAll(sql)).getRowsJS();
      return rows.map((row) => row.map((value) => (typeof value === "bigint" ? Number(value) : value)));
    } finally {
      connection.closeSync();
      instance.closeSync();
    }
  }

  it.each(["parquet", "csv"] as const)("reads every cell of every measure: %s", async (format) => {
    for (const measure of survey.measures.values()) {
      const { columns, rows } = measureTable(measure);
      const file = join(folder, "tables", `${measure.name}.${format}`);
      const types = columns.map(({ name, type }) => `'${name}': '${DUCK_TYPES[type]}'`).join(", ");
      const from =
        format === "parquet"
          ? `read_parquet('${file}')`
          : `read_csv('${file}', header = true, columns = {${types}}, nullstr = '')`;
      const read = await query(`select ${columns.map(({ name }) => `"${name}"`).join(", ")} from ${from}`);
      const expected = Array.from({ length: rows }, (_, row) =>
        columns.map(({ values }) => values[row] ?? null),
      );
      expect(read, measure.name).toEqual(expected);
    }
  });

  const DUCK_TYPES = { integer: "INTEGER", number: "DOUBLE", text: "VARCHAR" } as const;

  it("reads the flags, and answers questions about them", async () => {
    const rows = await query(
      `select id, antennas, time_start, channels, beam_major_change from read_parquet('${join(folder, "flags.parquet")}') order by id`,
    );
    expect(rows).toEqual([
      ["F1", "3 5", null, "all", Number.NaN],
      ["F2", "all", survey.times[1], "2-4 9", Number.NaN],
      ["F3", "all", null, "all", Number.NaN],
    ]);
  });
});

interface Outside {
  weights: { negative: number; sum: number };
  group_flags: { name: string; ants: number[][]; chans: number[][]; pflags: boolean[][]; reason: string[] };
  antennas: { antenna: number; name: string; coherence: number | "NaN" | null }[];
  baselines: Record<"antenna1" | "antenna2" | "uv_max_m", number[]>;
  flags: {
    source: number;
    ants: number[];
    timerang: number[];
    bands: number[];
    chans: number[];
    pflags: number[];
    reason: string;
    severity: number;
  }[];
  header: Record<string, number | string>;
  stations: [string, number, number[]][];
  sidereal: { header: number; computed: number };
}

describe.skipIf(systemTool("astropy") === undefined)("Python", () => {
  let outside: Outside;
  beforeAll(() => {
    outside = pythonJson(fileURLToPath(new URL("exports.py", import.meta.url)), [folder]) as Outside;
  });

  it("reads the tables by NumPy and csv", () => {
    const { table } = survey.measures.get("antenna")!;
    const expected = (name: string) => Array.from(table.array(name) as ArrayLike<number | string>);
    expect(outside.antennas.map(({ antenna }) => antenna)).toEqual(expected("antenna"));
    expect(outside.antennas.map(({ name }) => name)).toEqual(expected("name"));
    expect(outside.antennas.map(({ coherence }) => (coherence === "NaN" ? Number.NaN : coherence))).toEqual(
      expected("coherence"),
    );
    for (const [name, values] of Object.entries(outside.baselines)) {
      expect(values).toEqual(
        Array.from(survey.measures.get("baseline")!.table.array(name) as ArrayLike<number>),
      );
    }
  });

  it("reads the copies of a random-groups file: weights turned negative, and the flag table", async () => {
    const { union } = applied.counts;
    expect(outside.weights.negative).toBe(union.unflagged);
    let sum = 0;
    for await (const block of dataset.blocks({ want: "weights" })) {
      const samples = block.rows * dataset.shape.channels * dataset.shape.polarizations;
      for (let i = 0; i < samples; i++) sum += block.weight[i]!;
    }
    expect(Math.abs(outside.weights.sum / sum - 1)).toBeLessThan(1e-12);
    const { name, ants, chans, pflags, reason } = outside.group_flags;
    expect(name).toBe("VISVET FG");
    expect(reason).toEqual(outside.flags.map((flag) => flag.reason));
    expect(ants).toEqual(outside.flags.map((flag) => flag.ants));
    expect(chans).toEqual(outside.flags.map((flag) => flag.chans));
    expect(pflags).toEqual(outside.flags.map((flag) => flag.pflags.map(Boolean)));
  });

  it("reads the FLAG table by Astropy, times in days from RDATE", () => {
    const { flags: rows, header } = outside;
    expect(rows.map(({ reason }) => reason)).toEqual([
      "F1 silent-antenna",
      "F1 silent-antenna",
      "F2 burst",
      "F2 burst",
      "F3 one-hand-off",
    ]);
    expect(rows.map(({ ants }) => ants)).toEqual([
      [3, 0],
      [5, 0],
      [0, 0],
      [0, 0],
      [1, 2],
    ]);
    expect(rows.map(({ chans }) => chans)).toEqual([
      [0, 0],
      [0, 0],
      [3, 5],
      [10, 10],
      [0, 0],
    ]);
    expect(rows[4]!.pflags).toEqual([0, 1, 0, 0]);
    expect(rows.map(({ source, severity, bands }) => [source, severity, bands])).toEqual(
      [0, 0, 1, 1, 0].map((source) => [source, -1, [1]]),
    );
    expect(header).toMatchObject({ NO_STKD: 2, NO_BAND: 1, NO_CHAN: 16, RDATE: "2026-03-01" });
    const [start, end] = rows[2]!.timerang.map((days) => 61100 + days) as [number, number];
    const integration = survey.times[1]! - survey.times[0]!;
    // Between the integrations meant and those beside them: 10 s apart, widened by less than half of that.
    expect(start).toBeLessThanOrEqual(survey.times[1]!);
    expect(start).toBeGreaterThan(survey.times[1]! - integration / 2);
    expect(end).toBeGreaterThanOrEqual(survey.times[3]!);
    expect(end).toBeLessThan(survey.times[3]! + integration / 2);
  });

  it("finds the antennas and the sidereal time of the reference date", () => {
    expect(outside.stations.map(([, number]) => number)).toEqual(
      dataset.array.antennas.map(({ number }) => number),
    );
    for (const [i, [, , position]] of outside.stations.entries()) {
      expect(position).toEqual(dataset.array.antennas[i]!.position);
    }
    // UT1 - UTC is below 0.9 s: 0.004 degrees.
    expect(Math.abs(outside.sidereal.header - outside.sidereal.computed)).toBeLessThan(0.005);
  });
});

describe.skipIf(systemTool("fitsverify") === undefined)("fitsverify", () => {
  const verdict = (path: string, ...options: string[]) =>
    spawnSync(systemTool("fitsverify")!, ["-q", ...options, path], { encoding: "utf8" }).stdout.trim();

  it("finds nothing wrong in flags.fits, with flags and without", async () => {
    expect(verdict(join(folder, "flags.fits"))).toMatch(/^verification OK/);
    const empty = join(folder, "empty.fits");
    writeFileSync(empty, await flagBytes({ dataset, flags: [], survey }, "idi"));
    expect(verdict(empty)).toMatch(/^verification OK/);
  });

  it("finds nothing in copies with a flag table that the files before did not have", async () => {
    const [groups, idi] = [join(folder, "a.uvfits"), join(folder, "a.idifits")];
    await writeUvfits(dataset, groups);
    await writeFitsIdi(dataset, idi);
    for (const path of [groups, idi]) {
      const out = path.replace("a.", "b.");
      await applyFlags({ dataset: await openDataset(path), flags, out, into: "flag-table" });
      // It has words about both formats themselves: the primary header of FITS-IDI, the axes of its matrix.
      const count = (text: string) => /(\d+) errors?/.exec(text)?.[1] ?? "0";
      expect(count(verdict(out, "-e")), out).toBe(count(verdict(path, "-e")));
    }
  });
});
