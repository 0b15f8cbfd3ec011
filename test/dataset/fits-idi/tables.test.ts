/** The tables around the visibilities: antennas by name, setups, sources, and what is said where they disagree. */
import { describe, expect, it } from "vitest";
import { binaryTable, card, real } from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { DAY, fileMaker } from "../group-file.ts";
import {
  AXES,
  antennas,
  COLUMNS,
  frequency,
  GEOMETRY_CARDS,
  geometry,
  idiFile,
  source,
  USUAL_AXES,
  type UvSpec,
} from "../idi-file.ts";
import { lineOfError, readAll } from "../read-all.ts";

const file = fileMaker();
const open = (tables: Uint8Array[], spec: Partial<UvSpec> = {}) => openDataset(file(idiFile(spec, tables)));
type Noted = { notes: readonly { code: string; text: string }[] };
const codes = ({ notes }: Noted) => notes.map(({ code }) => code);
const text = ({ notes }: Noted, code: string) => notes.find((note) => note.code === code)?.text;
const ofRow = (value: (row: number) => number) => ({ form: "1J", cell: value });

describe("antennas", () => {
  const withAntennas = (...tables: Uint8Array[]) => open([...tables, frequency(), source()]);

  it("go by the numbers of ANTENNA, whatever their station numbers are; names link both", async () => {
    const dataset = await withAntennas(
      geometry({ names: ["East", "WEST ", "Mid"], numbers: [7, 8, 9] }),
      antennas([
        { name: "MID", number: 2 },
        { name: "East", number: 3 },
        { name: "West", number: 1 },
      ]),
    );
    expect(dataset.array.antennas.map(({ number, name, position }) => [number, name, position?.[1]])).toEqual(
      [
        [3, "East", 0],
        [1, "WEST", 100],
        [2, "Mid", 0],
      ],
    );
    expect(codes(dataset)).toEqual([]);
  });

  it("go by their station numbers where there is no ANTENNA table", async () => {
    const dataset = await withAntennas(geometry());
    expect(dataset.array.antennas.map(({ number }) => number)).toEqual([1, 2, 3]);
    expect(codes(dataset)).toEqual([]);
  });

  it("that ANTENNA alone has are known by name and have no position", async () => {
    const rows = ["ANT1", "ANT2", "ANT3", "ANT9"].map((name, i) => ({ name, number: i + 1 }));
    const dataset = await withAntennas(geometry(), antennas(rows));
    expect(dataset.array.antennas[3]).toEqual({ number: 4, name: "ANT9", position: null, diameter: null });
    expect(text(dataset, "missing-antenna-positions")).toBe(
      "HDU 2 (ARRAY_GEOMETRY) has no row for ANT9 of the ANTENNA table: their positions are unknown",
    );
  });

  it("that ANTENNA leaves out keep their station number, or are left out where it is taken", async () => {
    const dataset = await withAntennas(
      geometry({ names: ["A", "B", "C"], numbers: [1, 2, 4] }),
      antennas([
        { name: "B", number: 1 },
        { name: "X", number: 3 },
      ]),
    );
    expect(dataset.array.antennas.map(({ number, name }) => [number, name])).toEqual([
      [1, "B"],
      [4, "C"],
      [3, "X"],
      // Rows name antenna 2, which is nobody's number.
      [2, "2"],
    ]);
    expect(text(dataset, "antenna-without-number")).toContain("no number is given to A");
    expect(codes(dataset)).toContain("antenna-not-in-table");
  });

  it("of several arrays have numbers of their own", async () => {
    const dataset = await open(
      [
        geometry({ version: 2, names: ["D", "E", "F"] }),
        geometry(),
        antennas([
          ...[1, 2, 3].map((number) => ({ name: `ANT${number}`, number })),
          ...["D", "E", "F"].map((name, i) => ({ name, number: 11 + i, array: 2 })),
        ]),
        frequency(),
        source(),
      ],
      { columns: { ARRAY: ofRow((row) => 1 + (row % 2)) } },
    );
    expect(dataset.array.antennas.map(({ number, name }) => [number, name])).toEqual([
      [1, "ANT1"],
      [2, "ANT2"],
      [3, "ANT3"],
      [11, "D"],
      [12, "E"],
      [13, "F"],
    ]);
    expect(dataset.summary.subarrays).toEqual([1, 2]);
  });

  it("may come again for every stretch of time; another number then is a fault", async () => {
    const again = [1, 2, 3, 1, 2, 3].map((number) => ({ name: `ANT${number}`, number }));
    expect(codes(await withAntennas(geometry(), antennas(again)))).toEqual([]);
    const other = [...again, { name: "ANT2", number: 5 }];
    expect(text(await withAntennas(geometry(), antennas(other)), "antenna-twice")).toBe(
      "HDU 3 (ANTENNA) has more than one number for ANT2: the first counts",
    );
  });

  it("must have whole numbers", async () => {
    const odd = antennas([{ name: "ANT1", number: -4 }]);
    expect(await lineOfError(withAntennas(geometry(), odd))).toContain(
      "HDU 3 (ANTENNA): row 1: ANTENNA_NO is -4: expected a whole number from 0 to 65535",
    );
  });

  it("without ARRAY_GEOMETRY are called by their numbers", async () => {
    const dataset = await open([frequency(), source()]);
    expect(dataset.array.fromTable).toBe(false);
    expect(text(dataset, "missing-antenna-table")).toContain("no antenna table (ARRAY_GEOMETRY)");
  });
});

describe("frequencies", () => {
  const withFrequency = (table: Uint8Array, spec: Partial<UvSpec> = {}) =>
    open([geometry(), antennas(), table, source()], spec);

  it("of several setups are told by FREQID", async () => {
    const table = frequency({
      ids: [3, 1],
      offsets: [
        [2e8, 3e8],
        [0, 1e8],
      ],
    });
    const dataset = await withFrequency(table, { columns: { FREQID: ofRow((row) => (row < 2 ? 1 : 3)) } });
    expect(dataset.setups.map(({ id, frequencies }) => [id, frequencies[0]])).toEqual([
      [3, 1.6e9],
      [1, 1.4e9],
    ]);
    expect((await readAll(dataset)).setup).toEqual([1, 1, 0, 0]);
    expect(
      await lineOfError(withFrequency(table, { columns: { FREQID: ofRow((row) => 1 + 8 * row) } })),
    ).toContain("HDU 6 (UV_DATA), byte");
  });

  it("of a row whose setup is not in the table are refused with its place, unless there is one alone", async () => {
    const two = frequency({
      ids: [1, 2],
      offsets: [
        [0, 1e8],
        [2e8, 3e8],
      ],
    });
    const spec = { columns: { FREQID: ofRow((row) => (row === 2 ? 9 : 1)) } };
    expect(await lineOfError(withFrequency(two, spec))).toContain(
      "row 3: FREQID is 9: expected one of the FREQUENCY table: 1, 2",
    );
    expect(text(await withFrequency(frequency(), spec), "setup-not-in-table")).toBe(
      "rows name frequency setup (FREQID) 9: taken as the only one there is",
    );
  });

  it("fall where the sideband says so, and are not turned twice", async () => {
    const lower = await withFrequency(frequency({ sidebands: [[1, -1]] }));
    expect([...lower.setups[0]!.frequencies]).toEqual([1.4e9, 1.401e9, 1.402e9, 1.5e9, 1.499e9, 1.498e9]);
    expect(codes(lower)).toEqual([]);
    const axes = USUAL_AXES.map((axis) => (axis.type === "FREQ" ? { ...axis, step: -1e6 } : axis));
    const falls = await withFrequency(frequency({ sidebands: [[-1, -1]], widths: [[-1e6, -1e6]] }), { axes });
    expect([...falls.setups[0]!.frequencies.subarray(0, 3)]).toEqual([1.4e9, 1.399e9, 1.398e9]);
  });

  it("count from a fractional reference channel", async () => {
    const axes = USUAL_AXES.map((axis) => (axis.type === "FREQ" ? { ...axis, pixel: 0.5 } : axis));
    const { frequencies } = (await withFrequency(frequency(), { axes })).setups[0]!;
    expect([...frequencies.subarray(0, 3)]).toEqual([1.4005e9, 1.4015e9, 1.4025e9]);
  });

  it("are those of the axis without a table, for one sub-band alone", async () => {
    const tables = [geometry(), antennas(), source()];
    expect(await lineOfError(open(tables))).toContain(
      "2 sub-bands (BAND axis) and no frequency table (FREQUENCY): expected one with their frequencies",
    );
    const axes = [AXES.complex, AXES.stokes, AXES.freq];
    const one = await open(tables, { axes, columns: { WEIGHT: undefined } });
    expect([...one.setups[0]!.frequencies]).toEqual([1.4e9, 1.401e9, 1.402e9]);
    expect(codes(one)).toEqual(["missing-frequency-table"]);
  });

  it("are REF_FREQ where the matrix has no FREQ axis", async () => {
    const spec = { axes: [AXES.complex, AXES.stokes, AXES.band], cards: [card("REF_FREQ", real(2.3e11))] };
    const dataset = await withFrequency(frequency(), spec);
    expect([...dataset.setups[0]!.frequencies]).toEqual([2.3e11, 2.3e11 + 1e8]);
    expect(codes(dataset)).toEqual(["missing-frequency-axis"]);
    expect(await lineOfError(withFrequency(frequency(), { ...spec, cards: [] }))).toContain(
      "no axis of the matrix is called FREQ, and no table gives REF_FREQ: expected a frequency",
    );
  });
});

describe("sources", () => {
  const rows = [
    { id: 1, name: "A", ra: 10, dec: 20 },
    { id: 2, name: "B", ra: 11, dec: 21 },
  ];
  const withSource = (table: Uint8Array, spec: Partial<UvSpec> = {}) =>
    open([geometry(), antennas(), frequency(), table], spec);

  it.each(["SOURCE_ID", "ID_NO.", "ID. NO."])("are numbered in %s", async (id) => {
    const dataset = await withSource(source(rows, { id }), {
      columns: { SOURCE_ID: ofRow((row) => 1 + (row % 2)) },
    });
    expect(dataset.fields.map(({ id, name }) => [id, name])).toEqual([
      [1, "A"],
      [2, "B"],
    ]);
    expect(dataset.fields[1]!.declination).toBeCloseTo(21 * (Math.PI / 180), 15);
  });

  it.each([
    [["EQUINOX", "8A", "B1950"] as const, 1950],
    [["EPOCH", "1D", 1950] as const, 1950],
    [["EPOCH", "8A", "J2000.0"] as const, 2000],
    // Of the header of UV_DATA.
    [null, 2000],
  ])("have the equinox of %j", async (equinox, year) => {
    expect((await withSource(source(undefined, { equinox }))).fields[0]!.equinox).toBe(year);
  });

  it("without a table are the one of the axes RA and DEC", async () => {
    const dataset = await open([geometry(), antennas(), frequency()], { cards: [card("OBJECT", "Field Q")] });
    expect(dataset.fields).toMatchObject([{ id: 1, name: "Field Q", declination: -30.25 * (Math.PI / 180) }]);
    expect(text(dataset, "missing-source-table")).toBe(
      "no source table (SOURCE): the field is that of the header",
    );
  });

  it("that rows name and the table lacks are a fault", async () => {
    const dataset = await withSource(source(), { columns: { SOURCE_ID: ofRow((row) => 1 + row) } });
    expect(dataset.fields).toHaveLength(4);
    expect(codes(dataset)).toEqual(["field-not-in-table"]);
  });
});

describe("keywords that every table repeats", () => {
  it("are compared with the axes, which count", async () => {
    const cards = [card("NO_CHAN", 64), card("NO_BAND", 2), card("REF_FREQ", real(1.5e9)), card("STK_1", -1)];
    const dataset = await open([geometry(), antennas(), frequency({ cards }), source()]);
    expect(dataset.shape.channels).toBe(3);
    expect(text(dataset, "keywords-disagree")).toBe(
      "HDU 4 (FREQUENCY) says otherwise than the axes of UV_DATA, which count (in brackets): NO_CHAN 64 (3), " +
        "REF_FREQ 1500000000 (1400000000)",
    );
  });
});

describe("dates", () => {
  const dated = (rdate: string, observed: string) => {
    const cards = GEOMETRY_CARDS.map((one) => (one.keyword === "RDATE" ? card("RDATE", rdate) : one));
    return open([geometry({ cards }), antennas(), frequency(), source()], {
      cards: [card("DATE-OBS", observed)],
    });
  };

  it("that are none, or far from the rows, are faults", async () => {
    expect(codes(await dated("2024-06-15", "2024-06-15"))).toEqual([]);
    expect(codes(await dated("later", "2024-06-15"))).toEqual(["odd-date"]);
    expect(codes(await dated("2024-06-15", "2019-06-15"))).toEqual(["date-disagrees"]);
    const early = { columns: { DATE: { ...COLUMNS.DATE!, cell: () => DAY } } };
    expect(codes(await open([geometry(), antennas(), frequency(), source()], early))).toContain(
      "impossible-time",
    );
  });
});

describe("tables that are not needed", () => {
  it("are named and skipped, whatever they hold", async () => {
    const other = (name: string, form: string, cell: number[]) =>
      binaryTable({ name, columns: [{ name: "A", form, cells: [cell] }] });
    const dataset = await open([
      other("SYSTEM_TEMPERATURE", "2E", [1, 2]),
      geometry(),
      antennas(),
      frequency(),
      source(),
      other("PHASE-CAL", "1PE", [3]),
    ]);
    expect(text(dataset, "tables-skipped")).toBe(
      "not needed and not read: SYSTEM_TEMPERATURE (binary table), PHASE-CAL (binary table)",
    );
  });

  it("of one kind and number are used once", async () => {
    const dataset = await open([
      geometry(),
      geometry({ names: ["X", "Y", "Z"] }),
      antennas(),
      frequency(),
      source(),
    ]);
    expect(dataset.array.antennas[0]!.name).toBe("ANT1");
    expect(text(dataset, "duplicate-table")).toBe(
      "two ARRAY_GEOMETRY tables have EXTVER 1 and 1 (HDU 2 and HDU 3): HDU 2 is used",
    );
  });
});
