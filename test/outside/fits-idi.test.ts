/**
 * FITS-IDI cell by cell as Astropy reads it (fits-idi.py): our sample, and files of odd order that Astropy made. The
 * sample's sidereal time is held against ERFA's, its u, v, w against vector algebra on its tables.
 */
import { createHash } from "node:crypto";
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { sampleIndex } from "../../src/dataset/dataset.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { fileMaker } from "../dataset/group-file.ts";
import { itIsFresh, stored } from "../support/fresh.ts";
import { readAll } from "../support/read-all.ts";

type Cell = number | string;

interface Sample {
  tables: string[];
  shape: [rows: number, bands: number, channels: number, products: number];
  stokes: number[];
  frequencies: number[];
  antennas: [name: string, position: number[]][];
  source: [name: string, degreesEast: number, degreesNorth: number];
  cells: {
    row: number;
    band: number;
    channel: number;
    product: number;
    real: number;
    imag: number;
    weight: number;
    mjd: number;
    antennas: [number, number];
    u: number;
  }[];
  digests: Record<"real" | "imag" | "weight" | "time" | "u" | "v" | "w" | "integration", string>;
  gstia0: number;
  erfa_gmst82: number;
  worst_uvw_mm: number;
}

interface Made extends Record<"real" | "imag" | "weight" | "time" | "u" | "v" | "w", Cell[]> {
  name: string;
  shape: Sample["shape"];
  base64: string;
  baseline: number[];
  frequencies: number[];
}

const { sample, made } = stored<{ sample: Sample; made: Made[] }>("fits-idi");
const file = fileMaker();
const DEGREE = Math.PI / 180;

function digest(values: Float32Array | Float64Array): string {
  return createHash("sha256")
    .update(new Uint8Array(values.buffer, values.byteOffset, values.byteLength))
    .digest("hex");
}

describe("what Astropy reads", () => {
  itIsFresh("fits-idi");
});

describe("the sample in FITS-IDI", async () => {
  const dataset = await openDataset(
    fileURLToPath(new URL("../../sample-inputs/formats.idifits", import.meta.url)),
  );
  const block = await readAll(dataset);

  it("has every cell that Astropy reads, to the last bit", () => {
    const { subbands, channels, polarizations } = dataset.shape;
    expect([dataset.rows, subbands, channels, polarizations]).toEqual(sample.shape);
    for (const cell of sample.cells) {
      const { row } = cell;
      const i = sampleIndex(dataset.shape, row, cell.band, cell.channel, cell.product);
      expect([block.real[i], block.imag[i], block.weight[i]]).toEqual([cell.real, cell.imag, cell.weight]);
      expect([block.time[row], block.u[row]]).toEqual([cell.mjd, cell.u]);
      expect([block.antenna1[row], block.antenna2[row]]).toEqual(cell.antennas);
    }
    for (const [column, expected] of Object.entries(sample.digests)) {
      expect(digest(block[column as keyof Sample["digests"]]), column).toBe(expected);
    }
  });

  it("has the tables that Astropy reads", () => {
    expect(sample.tables).toEqual(["ARRAY_GEOMETRY", "ANTENNA", "FREQUENCY", "SOURCE", "UV_DATA"]);
    expect(dataset.array.antennas.map(({ name, position }) => [name, position])).toEqual(sample.antennas);
    // FITS Standard 4.0, table 29.
    expect([sample.stokes, dataset.polarizations]).toEqual([
      [-1, -2],
      ["RR", "LL"],
    ]);
    expect([...dataset.setups[0]!.frequencies]).toEqual(sample.frequencies);
    const [name, east, north] = sample.source;
    expect(dataset.fields).toMatchObject([
      { name, rightAscension: east * DEGREE, declination: north * DEGREE },
    ]);
  });

  // IAU 1982 mean sidereal time (Aoki et al. 1982, A&A 105, 359) by ERFA; a double of 205 degrees resolves 3e-14.
  it("has the sidereal time that ERFA gives for 0h of its reference day", () => {
    expect(Math.abs(sample.gstia0 - sample.erfa_gmst82)).toBeLessThan(1e-9);
    expect(dataset.array.siderealTimeAtReference).toBe(sample.gstia0);
  });

  it("has u, v, w within a millimetre of its antenna positions", () => {
    expect(sample.worst_uvw_mm).toBeLessThan(1);
  });
});

describe("a file that Astropy makes", () => {
  const numbers = (cells: readonly Cell[]) => cells.map(Number);

  it.each(made)("with $name reads as Astropy reads it", async (one) => {
    const dataset = await openDataset(file(Buffer.from(one.base64, "base64"), "made.fits"));
    const { subbands, channels, polarizations } = dataset.shape;
    expect([dataset.rows, subbands, channels, polarizations]).toEqual(one.shape);
    const block = await readAll(dataset, { blockRows: 2 });
    for (const column of ["real", "imag", "weight", "time", "u", "v", "w"] as const) {
      expect([...block[column]], column).toEqual(numbers(one[column]));
    }
    const codes = [...block.antenna1].map((antenna, row) => 256 * antenna + block.antenna2[row]!);
    expect(codes).toEqual(one.baseline);
    expect([...dataset.setups[0]!.frequencies]).toEqual(one.frequencies);
    // By the names in ANTENNA and ARRAY_GEOMETRY, which differ in order and case.
    expect(dataset.array.antennas.map(({ number, name }) => [number, name])).toEqual([
      [3, "North"],
      [1, "South"],
      [2, "Hill"],
    ]);
    expect(dataset.fields).toMatchObject([{ id: 4, name: "Heath", equinox: 1950 }]);
    expect(dataset.notes).toEqual([]);
  });
});
