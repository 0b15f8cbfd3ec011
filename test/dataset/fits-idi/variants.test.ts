/** The variants of FITS-IDI that writers produce: each reads to the same rows and samples. */
import { gzipSync } from "node:zlib";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { type AxisToWrite, card, real } from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { DAY, fileMaker } from "../group-file.ts";
import {
  AXES,
  antennas,
  BANDS,
  CHANNELS,
  COLUMNS,
  frequency,
  GEOMETRY_CARDS,
  geometry,
  idiFile,
  marker,
  PRODUCTS,
  primary,
  ROWS,
  source,
  USUAL_AXES,
  type UvSpec,
  usualTables,
  uvData,
} from "../idi-file.ts";
import { type AllRows, lineOfError, readAll } from "../read-all.ts";

const file = fileMaker();
const open = (spec: Partial<UvSpec> = {}, tables?: Uint8Array[]) =>
  openDataset(file(idiFile(spec, tables), "made.idifits"));
const codes = (dataset: { notes: readonly { code: string }[] }) => dataset.notes.map(({ code }) => code);

const plain: AllRows = await readAll(await open());

/** Indices of every sample in canonical order. */
function eachSample(visit: (i: number, row: number, at: Record<string, number>) => void): void {
  let i = 0;
  for (let row = 0; row < ROWS; row++) {
    for (let BAND = 0; BAND < BANDS; BAND++) {
      for (let FREQ = 0; FREQ < CHANNELS; FREQ++) {
        for (let STOKES = 0; STOKES < PRODUCTS; STOKES++, i++) visit(i, row, { BAND, FREQ, STOKES });
      }
    }
  }
}

describe("the plain file", () => {
  it("has its rows in file order with every column", () => {
    expect(plain.antenna1).toEqual([1, 2, 1, 2]);
    expect(plain.antenna2).toEqual([3, 3, 3, 3]);
    expect(plain.time).toEqual([0.25, 0.25, 0.25 + 1 / 1024, 0.25 + 1 / 1024].map((t) => DAY + t));
    expect(plain.u).toEqual([1, 2, 3, 4].map((x) => x * 1e-9));
    expect(plain.v).toEqual([2, 3, 4, 5].map((x) => -x * 1e-9));
    expect(plain.w).toEqual([0, 0.5, 1, 1.5].map((x) => x * 1e-9));
    expect(plain.subarray).toEqual([1, 1, 1, 1]);
    expect(plain.field).toEqual([1, 1, 1, 1]);
    expect(plain.setup).toEqual([0, 0, 0, 0]);
    expect(plain.integration).toEqual([10, 10, 10, 10]);
  });

  it("has its samples by row, sub-band, channel, polarization, and their weights", () => {
    eachSample((i, row, at) => {
      expect(plain.real[i]).toBe(marker(row, { ...at, COMPLEX: 0 }));
      expect(plain.imag[i]).toBe(marker(row, { ...at, COMPLEX: 1 }));
      expect(plain.weight[i]).toBe(100 * row + PRODUCTS * at.BAND! + at.STOKES! + 1);
    });
    expect(plain.real).toHaveLength(ROWS * BANDS * CHANNELS * PRODUCTS);
  });

  it("is described by its tables", async () => {
    const dataset = await open();
    expect(dataset.format).toBe("fits-idi");
    expect(dataset.name).toMatch(/^\d+-made$/);
    expect(dataset.shape).toEqual({ subbands: 2, channels: 3, polarizations: 2 });
    expect(dataset.polarizations).toEqual(["RR", "LL"]);
    expect([...dataset.setups[0]!.frequencies]).toEqual([1.4e9, 1.401e9, 1.402e9, 1.5e9, 1.501e9, 1.502e9]);
    expect([...dataset.setups[0]!.channelWidths]).toEqual([1e6, 1e6]);
    const centre = { rightAscension: 123.5 * (Math.PI / 180), declination: -30.25 * (Math.PI / 180) };
    expect(dataset.fields).toEqual([{ id: 1, name: "Field A", ...centre, equinox: 2000 }]);
    expect(dataset.array).toMatchObject({
      name: "Ridge",
      frame: "geocentric",
      fromTable: true,
      siderealTimeAtReference: 263.5,
      degreesPerDay: 360.9856449733,
      referenceDay: DAY,
      ut1MinusUtc: -0.1,
      timeSystem: "UTC",
    });
    expect(dataset.array.antennas[2]).toEqual({
      number: 3,
      name: "ANT3",
      position: [6378000, 0, 250],
      diameter: 25,
    });
    expect(dataset.header).toEqual({ telescope: "Invented", observed: "2024-06-15" });
    expect([dataset.unit, dataset.hasWeights, dataset.rows, dataset.notes]).toEqual(["Jy", true, 4, []]);
  });
});

describe("the order of things", () => {
  it("of the matrix axes does not matter: they are told by CTYPE", async () => {
    await fc.assert(
      fc.asyncProperty(fc.shuffledSubarray([...USUAL_AXES], { minLength: 6 }), async (axes) => {
        expect(await readAll(await open({ axes }))).toEqual(plain);
      }),
      { numRuns: 20 },
    );
  });

  it("of the tables does not matter, nor do others between them", async () => {
    const data = uvData();
    const orders = [
      [data, ...usualTables()],
      [frequency(), data, source(), geometry(), antennas()],
    ];
    for (const tables of orders) {
      const dataset = await openDataset(file(Buffer.concat([primary, ...tables])));
      expect(await readAll(dataset)).toEqual(plain);
      expect(dataset.notes).toEqual([]);
    }
  });

  it("of the columns does not matter, nor where among them the matrix stands", async () => {
    const { BASELINE, DATE, UU, ...rest } = COLUMNS;
    const columns = { ...Object.fromEntries(Object.keys(COLUMNS).map((name) => [name, undefined])), ...rest };
    const dataset = await open({
      columns: { ...columns, BASELINE: undefined, DATE: undefined, UU: undefined },
      columnsAfter: { BASELINE, DATE, GATEID: { form: "1J", cell: () => 7 }, UU },
    });
    expect(await readAll(dataset)).toEqual(plain);
  });

  it("may be gzipped", async () => {
    expect(await readAll(await openDataset(file(gzipSync(idiFile()), "made.idifits.gz")))).toEqual(plain);
  });
});

describe("u, v, w", () => {
  it.each([
    ["UU---SIN", "1E"],
    ["UU--", "1D"],
    ["uu", "1D"],
  ])("are called %s, too, in %s", async (name, form) => {
    const columns = { UU: undefined, [name]: { ...COLUMNS.UU!, form } };
    const { u } = await readAll(await open({ columns }));
    expect(u).toEqual(plain.u.map((value) => (form === "1E" ? Math.fround(value) : value)));
  });

  it("in wavelengths at the reference frequency become seconds", async () => {
    const wavelengths = { form: "1D", cell: (row: number) => 1.4e9 * (row + 1) };
    const dataset = await open({ columns: { UU: undefined, "UU-L-SIN": wavelengths } });
    expect((await readAll(dataset)).u).toEqual([1, 2, 3, 4]);
  });

  it("in another unit are said to be odd, and missing w too", async () => {
    expect(codes(await open({ columns: { UU: { ...COLUMNS.UU!, unit: "METERS" } } }))).toEqual([
      "odd-uvw-unit",
    ]);
    const flat = await open({ columns: { WW: undefined } });
    expect([codes(flat), (await readAll(flat)).w]).toEqual([["missing-w"], [0, 0, 0, 0]]);
  });

  it("may be NaN for orbiting stations", async () => {
    const dataset = await open({
      columns: { UU: { form: "1D", cell: (row) => (row === 0 ? Number.NaN : 1) } },
    });
    expect([codes(dataset), (await readAll(dataset)).u]).toEqual([["uvw-not-finite"], [Number.NaN, 1, 1, 1]]);
  });
});

describe("times", () => {
  it("are DATE and TIME added, whether TIME goes past midnight or DATE changes", async () => {
    const past = await open({ columns: { TIME: { form: "1D", cell: (row) => 0.75 + row / 2 } } });
    expect((await readAll(past)).time).toEqual([0.75, 1.25, 1.75, 2.25].map((t) => DAY + t));
    const changing = await open({
      columns: {
        DATE: { form: "1D", cell: (row) => DAY + row + 2400000.5 },
        TIME: { form: "1D", cell: () => 0.125 },
      },
    });
    expect((await readAll(changing)).time).toEqual([0, 1, 2, 3].map((day) => DAY + day + 0.125));
  });

  // A double of a Julian date is 4e-10 day (40 us) coarse, of an MJD 7e-12 day (0.6 us).
  it("keep microseconds, which a Julian date does not", async () => {
    const fine = 0.1 + 1e-11;
    const { time } = await readAll(await open({ columns: { TIME: { form: "1D", cell: () => fine } } }));
    expect(Math.abs(time[0]! - DAY - fine)).toBeLessThan(4e-12);
  });

  it("count from RDATE where there is no DATE, and are DATE alone where there is no TIME", async () => {
    const rdate = await open({ columns: { DATE: undefined } });
    expect([(await readAll(rdate)).time, codes(rdate)]).toEqual([plain.time, ["missing-date-column"]]);
    const date = { form: "1D", cell: () => DAY + 2400001 };
    const alone = await open({ columns: { TIME: undefined, DATE: date } });
    expect([(await readAll(alone)).time[0], codes(alone)]).toEqual([DAY + 0.5, ["missing-time-column"]]);
    expect(await lineOfError(open({ columns: { DATE: undefined, TIME: undefined } }))).toContain(
      "no columns DATE and TIME: expected the time of each row",
    );
  });

  it("in another system than UTC become UTC, whichever keyword gives the difference", async () => {
    const system = (...cards: ReturnType<typeof card>[]) => {
      const others = GEOMETRY_CARDS.filter(({ keyword }) => !/^(TIME?SYS|IATUTC)$/.test(keyword));
      return open({}, [geometry({ cards: [...others, ...cards] }), antennas(), frequency(), source()]);
    };
    const iat = await system(card("TIMESYS", "IAT"), card("IATUTC", real(36)));
    expect((await readAll(iat)).time[0]).toBeCloseTo(DAY + 0.25 - 36 / 86400, 10);
    const other = await system(card("TIMSYS", "TAI"), card("DATUTC", real(36)), card("IATUTC", real(36)));
    expect((await readAll(other)).time[0]).toBeCloseTo(DAY + 0.25 - 36 / 86400, 10);
    expect(other.array.timeSystem).toBe("TAI");
    expect(codes(await system(card("TIMSYS", "IAT")))).toEqual(["missing-time-offset"]);
  });
});

describe("baselines", () => {
  // 256 a1 + a2, and 65536 + 2048 a1 + a2 for large arrays.
  it.each([
    [256 * 7 + 9, [7, 9]],
    [65536 + 2048 * 300 + 1999, [300, 1999]],
    [257 * 3, [3, 3]],
  ])("of code %i are %j", async (code, pair) => {
    const dataset = await open({ columns: { BASELINE: { form: "1J", cell: () => code } } });
    const { antenna1, antenna2 } = await readAll(dataset);
    expect([antenna1[0], antenna2[0]]).toEqual(pair);
  });

  it("belong to the sub-array of column ARRAY, the first where it is 0 or missing", async () => {
    const tables = [geometry(), geometry({ version: 2 }), antennas(), frequency(), source()];
    const array = { form: "1J", cell: (row: number) => [1, 2, 0, 2][row]! };
    expect((await readAll(await open({ columns: { ARRAY: array } }, tables))).subarray).toEqual([1, 2, 1, 2]);
    expect((await readAll(await open({ columns: { ARRAY: undefined } }))).subarray).toEqual([1, 1, 1, 1]);
  });
});

describe("the source of a row", () => {
  it.each(["SOURCE_ID", "SOURCE"])("stands in %s", async (name) => {
    const columns = { SOURCE_ID: undefined, [name]: { form: "1J", cell: (row: number) => 1 + (row % 2) } };
    const two = source([
      { id: 1, name: "A", ra: 1, dec: 2 },
      { id: 2, name: "B", ra: 3, dec: 4 },
    ]);
    const dataset = await open({ columns }, [geometry(), antennas(), frequency(), two]);
    expect((await readAll(dataset)).field).toEqual([1, 2, 1, 2]);
  });
});

describe("several UV_DATA tables", () => {
  it("are one dataset, one after another", async () => {
    const parts = [uvData({ rows: 1 }), uvData({ rows: 2, firstRow: 1 }), uvData({ rows: 1, firstRow: 3 })];
    const [geo, ant, ...rest] = usualTables();
    const bytes = Buffer.concat([primary, geo!, parts[0]!, ant!, parts[1]!, ...rest, parts[2]!]);
    const dataset = await openDataset(file(bytes));
    expect(await readAll(dataset)).toEqual(plain);
    expect(dataset.notes).toEqual([]);
  });

  it("may differ in columns and in where the weights stand", async () => {
    const weighted = [AXES.weighted, ...USUAL_AXES.slice(1)];
    const stored: UvSpec["stored"] = (row, at) =>
      at.COMPLEX === 2 ? 100 * row + PRODUCTS * at.BAND! + at.STOKES! + 1 : marker(row, at);
    const parts = [
      uvData({ rows: 2, axes: weighted, stored, columns: { WEIGHT: undefined } }),
      uvData({ rows: 2, firstRow: 2, columns: { UU: undefined }, columnsAfter: { "UU--": COLUMNS.UU } }),
    ];
    const dataset = await openDataset(file(Buffer.concat([primary, ...usualTables(), ...parts])));
    expect(await readAll(dataset)).toEqual(plain);
  });

  it("without rows are passed over, said once", async () => {
    const bytes = Buffer.concat([primary, ...usualTables(), uvData({ rows: 0 }), uvData()]);
    const dataset = await openDataset(file(bytes));
    expect([await readAll(dataset), codes(dataset)]).toEqual([plain, ["empty-data-table"]]);
  });

  it("of different shape or polarizations are refused; of another FREQ axis, noted", async () => {
    const both = (spec: Partial<UvSpec>) =>
      openDataset(file(Buffer.concat([primary, ...usualTables(), uvData(), uvData(spec)])));
    const axes = (axis: AxisToWrite) => USUAL_AXES.map((one) => (one.type === axis.type ? axis : one));
    expect(await lineOfError(both({ axes: axes({ ...AXES.freq, length: 4 }) }))).toMatch(
      /HDU 7 \(UV_DATA\), byte \d+: the FREQ axis has length 4, that of HDU 6 \(UV_DATA\) 3: expected the same/,
    );
    expect(await lineOfError(both({ axes: axes({ ...AXES.stokes, value: -5 }) }))).toContain(
      "element 1 of the STOKES axis has code -5, that of HDU 6 (UV_DATA) -1",
    );
    expect(codes(await both({ axes: axes({ ...AXES.freq, value: 1.6e9 }) }))).toContain(
      "data-tables-disagree",
    );
  });
});

describe("the unit", () => {
  it.each([
    ["JY", "Jy"],
    ["UNCALIB", "uncalibrated"],
    ["", "uncalibrated"],
    ["K", "K"],
  ])("%s is %s", async (fluxUnit, unit) => {
    expect((await open({ fluxUnit })).unit).toBe(unit);
  });
});
