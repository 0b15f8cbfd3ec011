/**
 * The sample inputs as Astropy reads them and as NumPy computes them again (simulated-files.py): cells, u, v, w to the
 * millimetre, and the sky of the scenarios in the samples.
 */
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { sampleIndex } from "../../src/dataset/dataset.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { itIsFresh, stored } from "../support/fresh.ts";
import { readAll } from "../support/read-all.ts";

interface Cell {
  row: number;
  channel: number;
  product: number;
  real: number;
  imag: number;
  weight: number;
  mjd: number;
  antennas: [number, number];
  u: number;
  v: number;
  w: number;
}
const files =
  stored<
    {
      name: string;
      groups: number;
      shape: number[];
      worst_uvw_mm: number;
      cells: Cell[];
      chi_square?: number;
      degrees_of_freedom?: number;
    }[]
  >("simulated-files");

describe("the sample inputs", () => {
  itIsFresh("simulated-files");

  it.each(files)("$name reads as Astropy reads it", async ({ name, groups, shape, cells }) => {
    const path = fileURLToPath(new URL(`../../sample-inputs/${name}.uvfits`, import.meta.url));
    const dataset = await openDataset(path);
    expect(dataset.rows).toBe(groups);
    expect(shape).toEqual([1, 1, 1, dataset.shape.channels, dataset.shape.polarizations, 3]);
    const block = await readAll(dataset);
    for (const cell of cells) {
      const { row } = cell;
      const i = sampleIndex(dataset.shape, row, 0, cell.channel, cell.product);
      expect([block.real[i], block.imag[i], block.weight[i]]).toEqual([cell.real, cell.imag, cell.weight]);
      expect([block.u[row], block.v[row], block.w[row]]).toEqual([cell.u, cell.v, cell.w]);
      expect([block.antenna1[row], block.antenna2[row]]).toEqual(cell.antennas);
      // Astropy's Julian date resolves 4e-10 day.
      expect(Math.abs(block.time[row]! - cell.mjd)).toBeLessThan(1e-9);
    }
  });

  it.each(files)("$name has u, v, w within a millimetre of its antenna table", ({ worst_uvw_mm }) => {
    expect(worst_uvw_mm).toBeLessThan(1);
  });

  it.each(files.filter(({ chi_square }) => chi_square !== undefined))(
    "$name holds its sky and noise, and nothing else",
    ({ chi_square, degrees_of_freedom }) => {
      // The mean of n squared unit deviates is 1 to sqrt(2/n): four of these.
      expect(Math.abs(chi_square! - 1)).toBeLessThan(4 * Math.sqrt(2 / degrees_of_freedom!));
    },
  );
});
