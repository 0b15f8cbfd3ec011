/**
 * Tables of visibilities against readers and writers that are not ours: the sample table of text as Python's csv and NumPy
 * read it (tables.py), our Parquet and CSV as DuckDB reads them, and DuckDB's own Parquet, in its codecs, page kinds and row
 * groups, as we read it.
 */
import { createHash } from "node:crypto";
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { DuckDBInstance } from "@duckdb/node-api";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { openColumnar } from "../../src/dataset/columnar/open.ts";
import type { SampleBlock } from "../../src/dataset/dataset.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { itIsFresh, stored } from "../support/fresh.ts";
import { readAll, sameBits } from "../support/read-all.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-test-tables-"));
afterAll(() => rmSync(folder, { recursive: true, force: true }));

let duckdb: Awaited<ReturnType<DuckDBInstance["connect"]>>;
let original: SampleBlock;
beforeAll(async () => {
  duckdb = await (await DuckDBInstance.create(":memory:")).connect();
  original = await readAll(await openDataset("sample-inputs/formats.uvfits"));
});
afterAll(() => duckdb.closeSync());

async function query(sql: string): Promise<unknown[][]> {
  return (await (await duckdb.runAndReadAll(sql)).getRowsJS()) as unknown[][];
}

describe("The sample table of text, read by Python", () => {
  itIsFresh("tables");

  it("holds the samples of the random groups to the last bit", () => {
    const python = stored<
      Record<"real" | "imag" | "weight" | "u", string> & { rows: number; firstTime: number }
    >("tables");
    const hash = (values: Float32Array) =>
      createHash("sha256")
        .update(new Uint8Array(values.buffer, values.byteOffset, values.byteLength))
        .digest("hex");
    expect(python.rows).toBe(original.real.length);
    for (const key of ["real", "imag", "weight"] as const) expect(python[key], key).toBe(hash(original[key]));
    const eachSample = Float32Array.from({ length: python.rows }, (_, i) => original.u[Math.floor(i / 32)]!);
    expect(python.u).toBe(hash(eachSample));
    expect(python.firstTime).toBe(original.time[0]);
  });
});

describe("Our tables, read by DuckDB", () => {
  it("hold the same rows and lists in Parquet", async () => {
    const rows = await query(
      "select time, antenna1, antenna2, u, real, imag, weight from 'sample-inputs/formats.parquet'",
    );
    expect(rows).toHaveLength(original.rows);
    for (const at of [0, 1, 500, 1079]) {
      const [time, a1, a2, u, real, imag, weight] = rows[at]!;
      expect([time, a1, a2, u]).toEqual([
        original.time[at],
        original.antenna1[at],
        original.antenna2[at],
        original.u[at],
      ]);
      const cut = (column: Float32Array) => [...column.subarray(32 * at, 32 * (at + 1))];
      expect([real, imag, weight]).toEqual([cut(original.real), cut(original.imag), cut(original.weight)]);
    }
  });

  it("hold the same samples in CSV", async () => {
    const sums = await query(
      "select count(*), sum(real), sum(imag), max(abs(u)), count(distinct time) from 'sample-inputs/formats.csv'",
    );
    const [count, re, im, u, times] = sums[0] as [bigint, number, number, number, bigint];
    const sum = (values: Float32Array) => values.reduce((total, value) => total + value, 0);
    expect([Number(count), Number(times)]).toEqual([34_560, 30]);
    // Decimals of at most nine digits are within 6e-8 of the single-precision number, and the order of the sum is DuckDB's.
    expect(Math.abs(re - sum(original.real))).toBeLessThan(1e-2);
    expect(Math.abs(im - sum(original.imag))).toBeLessThan(1e-2);
    const longest = original.u.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
    // Half a unit in the last place of single precision.
    expect(Math.abs(u / (longest * 1e9) - 1)).toBeLessThan(6e-8);
  });

  it("carry their column map in the file's metadata", async () => {
    const found = await query(
      "select decode(key), decode(value) from parquet_kv_metadata('sample-inputs/formats.parquet')",
    );
    const map = found.find(([key]) => key === "visvet.columns")?.[1];
    expect(String(map)).toContain("lists: [ subband, channel, polarization ]");
  });
});

describe("DuckDB's tables, read by us", () => {
  const settings = [
    ["snappy", "row_group_size 2048"],
    ["zstd", "row_group_size 5000"],
    ["gzip", "row_group_size 100000"],
    ["uncompressed", "row_group_size 4096, parquet_version v2"],
    ["lz4_raw", "row_group_size 4096, dictionary_size_limit 1"],
  ] as const;

  it.each(settings)("give the same samples: one row a sample, %s, %s", async (codec, options) => {
    const path = join(folder, `duck-${codec}.parquet`);
    // Units and names of DuckDB's table are its own: the map is guessed from them.
    await query(
      `copy (select 61147 + time / 86400 as mjd, antenna1 as ant1, antenna2 as ant2, u as u_ns, v as v_ns, w as w_ns,
         subband, 1392 + 8 * subband + channel as freq_mhz, polarization as pol, real::float as re, imag::float as im,
         weight::float as wt from 'sample-inputs/formats.csv' limit 9600)
       to '${path}' (format parquet, compression ${codec}, ${options})`,
    );
    const table = await openColumnar([path]);
    expect(table.shape).toEqual({ subbands: 2, channels: 8, polarizations: 2 });
    const found = await readAll(table);
    for (const key of ["real", "imag", "weight"] as const) {
      expect(sameBits(found[key], original[key].subarray(0, 9600)), key).toBe(true);
    }
    expect([...found.time]).toEqual([...original.time.subarray(0, 300)]);
    expect(table.setups[0]!.frequencies[15]).toBe(1.407e9);
  });

  it("give the same samples: lists of floats, in row groups of one page and of many", async () => {
    for (const size of [2048, 100_000]) {
      const path = join(folder, `lists-${size}.parquet`);
      await query(
        `copy (select * from 'sample-inputs/formats.parquet') to '${path}'
         (format parquet, compression zstd, row_group_size ${size})`,
      );
      const found = await readAll(await openColumnar([path], { columnMap: mapFile() }));
      expect(sameBits(found.real, original.real)).toBe(true);
      expect([...found.u]).toEqual([...original.u]);
    }
  });

  it("give timestamps, names, booleans and nulls", async () => {
    const path = join(folder, "typed.parquet");
    await query(
      `copy (select timestamp '2026-04-17 10:00:30.000025' as time, 'East' as station1, 'West' as station2,
         1e-7::double as u, 2e-7::double as v, 0::double as w, 1.4e9 as frequency, 'XX' as pol,
         case when i = 0 then null else i end::float as re, 1::float as im, i = 2 as flag, i as channel
         from range(3) t(i)) to '${path}' (format parquet)`,
    );
    // A channel of each row, at one frequency: nonsense for science, and read as it stands.
    const found = await readAll(await openColumnar([path]));
    expect([...found.weight]).toEqual([0, 1, -1]);
    // 61147 d + 36030.000025 s; unix seconds in double precision resolve 0.24 us.
    expect(Math.abs((found.time[0]! - 61_147) * 86_400 - 36_030.000025)).toBeLessThan(1e-6);
    expect([found.antenna1[0], found.antenna2[0]]).toEqual([1, 2]);
  });
});

function mapFile(): string {
  return join(folder, "lists.yaml");
}

beforeAll(async () => {
  const { saveColumnMap } = await import("../../src/dataset/columnar/save-map.ts");
  await saveColumnMap(await openDataset("sample-inputs/formats.parquet"), mapFile());
});
