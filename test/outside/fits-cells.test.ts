/**
 * Cell by cell as Astropy reads them: files that Astropy made (fits-made.py, stored with their bytes), files that we
 * write, the random-groups file among the test data that Astropy installs (fits-read.py), where Python is there.
 */
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { openFits } from "../../src/dataset/fits/hdus.ts";
import { imageLayout, readImage } from "../../src/dataset/fits/image.ts";
import { openSource } from "../../src/dataset/fits/source.ts";
import { type Column, tableLayout } from "../../src/dataset/fits/table-layout.ts";
import { readTable, type Table } from "../../src/dataset/fits/table-rows.ts";
import { binaryTable, card, headerBlocks, real } from "../../src/dataset/fits/write.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { MJD_EPOCH_JD } from "../../src/util/dates.ts";
import { everyColumn } from "../dataset/fits/every-column.ts";
import {
  COMPLEX,
  DEC,
  fileMaker,
  freq,
  groupFile,
  parameters,
  RA,
  sourceTable,
  stokes,
  subbands,
} from "../dataset/group-file.ts";
import { readAll } from "../dataset/read-all.ts";
import { itIsFresh, stored } from "../support/fresh.ts";
import { pythonJson, systemTool } from "../support/require.ts";

type Cell = number | string | boolean | Cell[];

interface AsRead {
  path?: string;
  keywords: Record<string, Cell>;
  groups?: { names: string[]; parameters: Cell[][]; shape: number[]; array: Cell[] };
  tables: { name: string; columns: Record<string, Cell[]> }[];
  image?: { shape: number[]; values: Cell[] };
}

const made = stored<(AsRead & { name: string; base64: string })[]>("fits-made");
const file = fileMaker();
const script = fileURLToPath(new URL("fits-read.py", import.meta.url));
const noPython = systemTool("astropy") === undefined;

/** Those of the files that exist. */
function asAstropyReads(...paths: string[]): AsRead[] {
  return noPython ? [] : (pythonJson(script, paths) as AsRead[]);
}

/** What JSON has no number for is a string. */
function asNumber(cell: Cell | undefined): number {
  return cell === undefined ? Number.NaN : Number(cell);
}

/** The same number, NaN included; the sign of zero is left out. */
function expectSame(ours: ArrayLike<number>, theirs: readonly Cell[], what: string): void {
  expect(ours.length, what).toBe(theirs.length);
  for (let i = 0; i < ours.length; i++) {
    if (ours[i] !== asNumber(theirs[i])) expect(ours[i], `${what}, element ${i}`).toBe(asNumber(theirs[i]));
  }
}

/** u, v, w, time, antennas and every sample of a dataset against the cells of its file. */
async function expectGroups(path: string, { groups }: AsRead): Promise<void> {
  const dataset = await openDataset(path);
  const ours = await readAll(dataset, { want: "samples", blockRows: 2 });
  const column = (start: string) => {
    const found = groups!.names.flatMap((name, i) =>
      name.startsWith(start) ? [groups!.parameters[i]!] : [],
    );
    return found[0]!.map((_, row) => found.map((values) => asNumber(values[row])));
  };
  const one = (start: string) => column(start).map(([value]) => value!);
  expectSame(ours.u, one("UU"), "u");
  expectSame(ours.v, one("VV"), "v");
  expectSame(ours.w, one("WW"), "w");
  column("DATE").forEach(([first, second = 0], row) => {
    // The first part is a Julian day, and float64 keeps 4e-10 day of it; ours keeps what is beyond that.
    expect(Math.abs(ours.time[row]! - (first! - MJD_EPOCH_JD + second))).toBeLessThan(5e-10);
  });
  const codes = ours.antenna1.map((a, row) => 256 * a + ours.antenna2[row]!);
  expectSame(codes, one("BASELINE"), "baseline");
  const samples = [ours.real, ours.imag, ours.weight];
  // Astropy gives the array by row, last axis (COMPLEX) fastest: the canonical order for the usual axes.
  const mixed = groups!.array.map((_, i) => samples[i % 3]![Math.floor(i / 3)]!);
  const rounded = groups!.array.map((cell) => Math.fround(asNumber(cell)));
  expectSame(mixed, rounded, "samples");
}

function oursOf(table: Table, row: number, column: Column): number[] | string {
  switch (column.code) {
    case "A":
      return table.text(row, column);
    case "L":
      return table.logicals(row, column).map(Number);
    case "X":
      return table.bits(row, column).map(Number);
    case "K":
      return table.integers(row, column).map(Number);
    default:
      return [...table.numbers(row, column)];
  }
}

async function expectTables(path: string, { tables }: AsRead): Promise<void> {
  const fits = await openFits(await openSource(path));
  const ours = fits.hdus.filter(({ kind }) => kind === "binary table");
  expect(ours.map(({ name }) => name)).toEqual(tables.map(({ name }) => name));
  const cursor = await fits.source.cursor();
  for (const [t, hdu] of ours.entries()) {
    const table = await readTable(cursor, tableLayout(hdu));
    for (const column of table.layout.columns) {
      const theirs = tables[t]!.columns[column.name]!;
      expect(table.rows).toBe(theirs.length);
      theirs.forEach((cell, row) => {
        const what = `${hdu.name} ${column.name} row ${row + 1}`;
        const mine = oursOf(table, row, column);
        if (typeof mine === "string") expect(mine, what).toBe(cell);
        else expectSame(mine, (cell as Cell[]).flat(), what);
      });
    }
  }
  await cursor.close();
}

async function expectKeywords(path: string, { keywords }: AsRead): Promise<void> {
  const { header } = (await openFits(await openSource(path))).hdus[0];
  for (const [keyword, value] of Object.entries(keywords)) {
    if (typeof value === "string") expect(header.text(keyword), keyword).toBe(value.trimEnd());
    else if (typeof value === "boolean") expect(header.logical(keyword), keyword).toBe(value);
    else expect(header.number(keyword), keyword).toBe(value);
  }
}

describe("files that Astropy makes", () => {
  itIsFresh("fits-made");

  it.each(made)("$name reads as Astropy reads it", async (asRead) => {
    const path = file(Buffer.from(asRead.base64, "base64"));
    await expectKeywords(path, asRead);
    await expectTables(path, asRead);
    if (asRead.groups !== undefined) await expectGroups(path, asRead);
    if (asRead.image !== undefined) {
      const fits = await openFits(await openSource(path));
      const layout = imageLayout(fits.hdus[0]);
      expect([...layout.axes].reverse()).toEqual(asRead.image.shape);
      const values = new Float64Array(layout.elements);
      const cursor = await fits.source.cursor();
      await readImage(cursor, layout, 0, values);
      await cursor.close();
      expectSame(values, asRead.image.values, "pixels");
    }
  });
});

describe.skipIf(noPython)("files that we write", () => {
  const read = (path: string) => asAstropyReads(path)[0]!;

  it.each([-32, -64, 32] as const)("as random groups of BITPIX %i read alike in Astropy", async (bitpix) => {
    const path = file(
      groupFile({
        bitpix,
        axes: [COMPLEX, stokes(4), freq(5, 2.1e9, -8e6), subbands(2), RA, DEC],
        parameters: Object.values(parameters).map((p) =>
          bitpix === 32 ? { ...p, stored: (row) => Math.round(p.stored(row)) } : p,
        ),
        stored: (row, at) => (row - 1.5) * 7 + at.FREQ! + 10 * at.IF! + 100 * at.STOKES! + at.COMPLEX!,
        cards: [
          card("OBJECT", "It's Field A"),
          card("TELESCOP", "x ".repeat(60)),
          card("EQUINOX", real(2000)),
        ],
      }),
    );
    const asRead = read(path);
    await expectKeywords(path, asRead);
    await expectTables(path, asRead);
    await expectGroups(path, asRead);
  });

  it("as tables with every column type read alike in Astropy", async () => {
    const primary = headerBlocks([
      card("SIMPLE", true),
      card("BITPIX", 8),
      card("NAXIS", 0),
      card("EXTEND", true),
    ]);
    const table = binaryTable({
      name: "EVERY",
      columns: [
        ...everyColumn,
        { name: "S", form: "1I", cells: [10, -5], keywords: { TSCAL: real(0.5), TZERO: real(100) } },
      ],
    });
    const path = file(
      Buffer.concat([primary, table, sourceTable([{ id: 3, name: "Target", ra: 1.5, dec: -2.5 }])]),
    );
    await expectTables(path, read(path));
  });
});

// astropy/io/fits/tests/data, where the package has its test data.
describe("the random-groups file that Astropy installs", () => {
  // 2.1 GHz, with interference.
  const [asRead] = asAstropyReads("astropy:random_groups.fits");

  it.skipIf(asRead === undefined)("reads as Astropy reads it", async () => {
    await expectGroups(asRead!.path!, asRead!);
    await expectKeywords(asRead!.path!, asRead!);
  });

  it.skipIf(asRead === undefined)(
    "is Stokes I in 128 channels that fall in frequency, without an antenna table",
    async () => {
      const dataset = await openDataset(asRead!.path!);
      expect([dataset.rows, dataset.shape, dataset.polarizations]).toEqual([
        3,
        { subbands: 1, channels: 128, polarizations: 1 },
        ["I"],
      ]);
      const { frequencies, channelWidths } = dataset.setups[0]!;
      expect(frequencies[0]).toBe(2.09749994068e9);
      expect(frequencies[127]).toBeCloseTo(2.09749994068e9 - 127 * 7.99999977374e6, 3);
      expect(channelWidths[0]).toBe(7.99999977374e6);
      expect(dataset.array.fromTable).toBe(false);
      expect(dataset.array.antennas.map(({ number }) => number)).toEqual([1, 2, 3]);
    },
  );
});

describe("tables among the test data that Astropy installs", () => {
  // Column types, shapes, a gap before the heap, columns of no width, variable arrays: made by other writers than ours.
  const names = [
    "btable",
    "tb",
    "tdim",
    "theap-gap",
    "variable_length_table",
    "zerowidth",
    "stddata",
    "memtest",
  ];
  const tables = asAstropyReads(...names.map((name) => `astropy:${name}.fits`));

  it.skipIf(tables.length === 0)("read as Astropy reads them", async () => {
    for (const asRead of tables) await expectTables(asRead.path!, asRead);
    expect(tables.length).toBeGreaterThan(0);
  });
});
