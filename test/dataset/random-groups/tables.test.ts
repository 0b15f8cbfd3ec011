/** Antenna, frequency, source and flag tables as writers leave them, and what is said of their oddities. */
import { describe, expect, it } from "vitest";
import type { Dataset } from "../../../src/dataset/dataset.ts";
import {
  binaryTable,
  type ColumnToWrite,
  card,
  headerBlocks,
  real,
} from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import {
  antennaTable,
  COMPLEX,
  DEC,
  fileMaker,
  freq,
  frequencyTable,
  type GroupFileSpec,
  groupFile,
  type ParameterSpec,
  parameters,
  plainSpec,
  RA,
  sourceTable,
  stokes,
  subbands,
} from "../group-file.ts";
import { lineOfError, readAll } from "../read-all.ts";

const file = fileMaker();
const open = (spec: Partial<GroupFileSpec> = {}) => openDataset(file(groupFile(spec)));
const withTables = (...tables: Uint8Array[]) => open({ tables });
const codes = ({ notes }: Dataset) => notes.map(({ code }) => code);
const text = ({ notes }: Dataset, code: string) => notes.find((note) => note.code === code)?.text;
const withParameter = (parameter: ParameterSpec) => [...plainSpec.parameters, parameter];

describe("the frequency table", () => {
  const axis = (step: number, length = 3) => ({
    axes: [COMPLEX, stokes(2), freq(length, 1.4e9, step), subbands(2), RA, DEC],
  });
  const firstSteps = ({ setups, shape }: Dataset) => {
    const { frequencies } = setups[0]!;
    return [0, shape.channels].map((at) => (frequencies[at + 1]! - frequencies[at]!) / 1e6);
  };

  // The sign of the step may stand in CDELT, in CH WIDTH or in SIDEBAND, and must be applied once.
  it.each([
    [1e6, 1e6, 1, 1, []],
    [1e6, 1e6, -1, -1, []],
    [-1e6, -1e6, -1, -1, []],
    [-1e6, 1e6, -1, -1, ["frequency-order-disagrees"]],
    [1e6, -1e6, -1, -1, ["frequency-order-disagrees"]],
    [-1e6, -1e6, 1, -1, ["frequency-order-disagrees"]],
    [-1e6, 1e6, 1, -1, ["frequency-order-disagrees"]],
    [2e6, 1e6, 1, 1, ["channel-width-disagrees"]],
  ])(
    "with CDELT %d, CH WIDTH %d and SIDEBAND %d steps by %d MHz",
    async (step, width, sideband, expected, notes) => {
      const both = (value: number) => [[value, value]];
      const dataset = await open({
        ...axis(step),
        tables: [antennaTable(), frequencyTable({ widths: both(width), sidebands: both(sideband) })],
      });
      expect(firstSteps(dataset)).toEqual([expected, expected]);
      expect(codes(dataset)).toEqual(notes);
      expect([...dataset.setups[0]!.channelWidths]).toEqual([1e6, 1e6]);
    },
  );

  it("gives each sub-band its own sideband and width", async () => {
    const dataset = await withTables(
      antennaTable(),
      frequencyTable({ widths: [[1e6, 2e6]], sidebands: [[1, -1]] }),
    );
    expect(firstSteps(dataset)).toEqual([1, -2]);
    expect([...dataset.setups[0]!.channelWidths]).toEqual([1e6, 2e6]);
  });

  // FITS linear axis: value(p) = CRVAL + (p - CRPIX) CDELT, p from 1.
  it("counts channels from the reference pixel", async () => {
    const axes = [COMPLEX, stokes(2), { ...freq(3), pixel: 33 }, subbands(2), RA, DEC];
    const dataset = await open({ axes });
    expect(dataset.setups[0]!.frequencies[0]).toBe(1.4e9 - 32e6);
  });

  it("falls back on CDELT, then on the sub-band's bandwidth, then says that there is no width", async () => {
    const zero = [[0, 0]];
    const fromStep = await open({ ...axis(5e5), tables: [antennaTable(), frequencyTable({ widths: zero })] });
    expect([...fromStep.setups[0]!.channelWidths]).toEqual([5e5, 5e5]);
    const nothing = await open({ ...axis(0), tables: [antennaTable(), frequencyTable({ widths: zero })] });
    expect([...nothing.setups[0]!.channelWidths]).toEqual([Number.NaN, Number.NaN]);
    expect(codes(nothing)).toEqual(["missing-channel-width"]);
    const columns: ColumnToWrite[] = [
      { name: "FRQSEL", form: "1J", cells: [1] },
      { name: "IF FREQ", form: "2D", cells: [[0, 1e8]] },
      { name: "TOTAL BANDWIDTH", form: "2E", cells: [[3e6, 6e6]] },
    ];
    const shared = await open({ ...axis(0), tables: [antennaTable(), binaryTable({ name: "FQ", columns })] });
    expect([...shared.setups[0]!.channelWidths]).toEqual([1e6, 2e6]);
  });

  it("says which frequencies make no sense", async () => {
    const dataset = await withTables(antennaTable(), frequencyTable({ offsets: [[-2e9, Number.NaN]] }));
    expect(text(dataset, "impossible-frequency")).toBe(
      "frequency setup 1 has a channel at -600000000 Hz: expected more than 0 and at most 10000000000000",
    );
    const high = await withTables(antennaTable(), frequencyTable({ offsets: [[0, 1e14]] }));
    expect(codes(high)).toContain("impossible-frequency");
  });

  it("must give every sub-band of the groups; may give more, said as a fault", async () => {
    expect(await lineOfError(withTables(antennaTable(), frequencyTable({ offsets: [[0]] })))).toContain(
      "HDU 3 (SETUP FQ): row 1 gives 1 sub-bands, the groups have 2: expected as many",
    );
    expect(codes(await withTables(antennaTable(), frequencyTable({ offsets: [[0, 1e8, 2e8]] })))).toEqual([
      "subbands-disagree",
    ]);
  });

  it("must be there when there are several sub-bands, and need not for one", async () => {
    expect(await lineOfError(withTables(antennaTable()))).toContain(
      "2 sub-bands (IF axis) and no frequency table (FQ): expected one with their frequencies",
    );
    const one = await open({ axes: [COMPLEX, stokes(1), freq(4, 1.4e9, -62500)], tables: [antennaTable()] });
    // Check value "freq-axis": channel 3 from 0 of CRVAL 1.4e9, CDELT -62500.
    expect(one.setups[0]!.frequencies[3]).toBe(1399812500);
    expect(codes(one)).toContain("missing-frequency-table");
  });

  it("refuses no rows, takes the first of two equal numbers, and refuses rows of an unknown setup", async () => {
    const empty = binaryTable({ name: "FQ", columns: [{ name: "IF FREQ", form: "2D", cells: [] }] });
    expect(await lineOfError(withTables(empty))).toContain("the frequency table has no rows");
    expect(codes(await withTables(antennaTable(), frequencyTable({ ids: [1, 1] })))).toEqual(["setup-twice"]);
    const freqsel = { name: "FREQSEL", stored: (row: number) => (row === 2 ? 4 : 1) };
    const tables = [antennaTable(), frequencyTable({ ids: [1, 2] })];
    expect(await lineOfError(open({ parameters: withParameter(freqsel), tables }))).toContain(
      "group 3: FREQSEL is 4: expected one of the FQ table: 1, 2",
    );
    const lone = await open({ parameters: withParameter(freqsel) });
    expect(text(lone, "setup-not-in-table")).toBe(
      "rows name frequency setup (FREQSEL) 4: taken as the only one there is",
    );
    const axes = [COMPLEX, stokes(1), freq(2), RA, DEC];
    const alone = await open({ parameters: withParameter(freqsel), axes, tables: [antennaTable()] });
    expect(codes(alone)).toEqual(["missing-frequency-table"]);
  });

  it("leaves it to the antenna table to give a frequency where there is no FREQ axis", async () => {
    const axes = [COMPLEX, stokes(1)];
    const table = antennaTable({ cards: [card("FREQ", real(2.3e11))] });
    const dataset = await open({ axes, tables: [table] });
    expect([...dataset.setups[0]!.frequencies]).toEqual([2.3e11]);
    expect(codes(dataset)).toContain("missing-frequency-axis");
    expect(await lineOfError(open({ axes, tables: [antennaTable()] }))).toContain(
      "no axis of the group is called FREQ, and no antenna table gives FREQ: expected a frequency",
    );
  });
});

describe("the source table", () => {
  const source = { name: "SOURCE", stored: (row: number) => (row === 0 ? 1 : 2) };
  const two = [
    { id: 1, name: "A", ra: 10, dec: 20 },
    { id: 2, name: "B", ra: 11, dec: 21, epoch: 1950 },
  ];

  it.each(["ID. NO.", "SOURCE_ID", "ID_NO."])("is read with its numbers in %s", async (name) => {
    const tables = [antennaTable(), frequencyTable(), sourceTable(two, name)];
    const dataset = await open({ parameters: withParameter(source), tables });
    expect(dataset.fields.map((field) => field.name)).toEqual(["A", "B"]);
    expect(dataset.fields[1]!.rightAscension).toBeCloseTo(11 * (Math.PI / 180), 15);
  });

  it("that lacks sources of the rows gets them without names, said as a fault", async () => {
    const tables = [antennaTable(), frequencyTable(), sourceTable(two.slice(0, 1))];
    const dataset = await open({ parameters: withParameter(source), tables });
    expect(dataset.fields[1]).toEqual({
      id: 2,
      name: "source 2",
      rightAscension: Number.NaN,
      declination: Number.NaN,
      equinox: Number.NaN,
    });
    expect(codes(dataset)).toEqual(["field-not-in-table"]);
  });

  it("that is missing leaves the header's field for one source, and numbers for several", async () => {
    const one = await open({ parameters: withParameter({ name: "SOURCE", stored: () => 5 }) });
    expect([one.fields[0]!.id, one.fields[0]!.name, codes(one)]).toEqual([
      5,
      "Field A",
      ["missing-source-table"],
    ]);
    const several = await open({ parameters: withParameter(source) });
    expect(several.fields.map(({ name }) => name)).toEqual(["source 1", "source 2"]);
    expect(codes(several)).toEqual(["missing-source-table"]);
  });

  it("names the one field of rows without a SOURCE parameter", async () => {
    const dataset = await withTables(antennaTable(), frequencyTable(), sourceTable(two.slice(1)));
    expect((await readAll(dataset)).field).toEqual([2, 2, 2, 2]);
    expect(dataset.fields.map(({ name }) => name)).toEqual(["B"]);
    const several = await withTables(antennaTable(), frequencyTable(), sourceTable(two));
    expect([several.fields.map(({ name }) => name), codes(several)]).toEqual([
      ["Field A"],
      ["missing-source-parameter"],
    ]);
  });

  it("may give impossible places and epochs, said as faults", async () => {
    const odd = [
      { id: 1, name: "A", ra: 10, dec: 120 },
      { id: 2, name: "B", ra: 11, dec: 21, epoch: 20000 },
    ];
    const tables = [antennaTable(), frequencyTable(), sourceTable(odd)];
    const dataset = await open({ parameters: withParameter(source), tables });
    expect(codes(dataset)).toEqual(["impossible-phase-centre", "impossible-epoch"]);
  });

  it("must number its sources", async () => {
    const columns: ColumnToWrite[] = [{ name: "SOURCE", form: "4A", cells: ["A"] }];
    expect(
      await lineOfError(withTables(antennaTable(), frequencyTable(), binaryTable({ name: "SU", columns }))),
    ).toContain("HDU 4 (SU): no column ID. NO. or SOURCE_ID");
  });
});

describe("the equinox of the header", () => {
  it.each([
    [[card("EPOCH", real(1950))], 1950],
    [[card("EQUINOX", "J2000")], 2000],
    [[card("EQUINOX", "B1950.0")], 1950],
    [[card("EQUINOX", real(2000)), card("EPOCH", real(1950))], 2000],
    [[card("RADESYS", "FK4")], 1950],
    [[card("RADESYS", "ICRS")], 2000],
    [[card("EPOCH", real(0))], Number.NaN],
    [[], Number.NaN],
  ])("of %j is %d", async (cards, year) => {
    expect((await open({ cards })).fields[0]!.equinox).toBe(year);
  });

  it("that no year can be is a fault", async () => {
    expect(codes(await open({ cards: [card("EPOCH", real(1.95))] }))).toEqual(["impossible-epoch"]);
  });
});

describe("dates", () => {
  it("in the old form are read; no dates, and dates far from the rows, are faults", async () => {
    const observed = (date: string) => open({ cards: [card("DATE-OBS", date)] });
    expect(codes(await observed("2024-06-14"))).toEqual([]);
    expect(codes(await observed("15/06/24"))).toEqual(["date-disagrees"]);
    expect(codes(await observed("2023-06-15"))).toEqual(["date-disagrees"]);
    expect(codes(await observed("not yet"))).toEqual(["odd-date"]);
    const rdate = antennaTable({ cards: [card("RDATE", "99/99/99")] });
    expect(codes(await withTables(rdate, frequencyTable()))).toEqual(["odd-date"]);
  });

  it("of the rows that no interferometer saw are a fault", async () => {
    const early = plainSpec.parameters.map((p) => (p === parameters.date ? { ...p, zero: 0 } : p));
    expect(codes(await open({ cards: [], parameters: early }))).toEqual(["impossible-time"]);
  });
});

describe("the antenna table", () => {
  it("may come once a sub-array; later ones add their antennas", async () => {
    const second = antennaTable({
      version: 2,
      numbers: [4, 1],
      names: ["NEW", "ANT1"],
      positions: [
        [6378000, 7, 8],
        [6378000, 0, 0],
      ],
    });
    const dataset = await withTables(second, antennaTable(), frequencyTable());
    expect(dataset.array.antennas.map(({ number, name }) => [number, name])).toEqual([
      [1, "ANT1"],
      [2, "ANT2"],
      [3, "ANT3"],
      [4, "NEW"],
    ]);
    expect(codes(dataset)).toEqual([]);
  });

  it("may number its antennas from 1 in each sub-array: a number is one antenna, in tables and rows", async () => {
    const second = antennaTable({ version: 2, names: ["X", "ANT2", "ANT1"] });
    const subarrayTwo = plainSpec.parameters.map((p) =>
      p === parameters.baseline ? { ...p, stored: (row: number) => p.stored(row) + (row < 2 ? 0 : 0.01) } : p,
    );
    const dataset = await open({
      parameters: subarrayTwo,
      tables: [antennaTable(), second, frequencyTable()],
    });
    expect(dataset.array.antennas.map(({ number, name }) => `${number} ${name}`)).toEqual([
      "1 ANT1",
      "2 ANT2",
      "3 ANT3",
      "4 X",
      "5 ANT1",
    ]);
    const rows = await readAll(dataset);
    // Antenna 1 of the second sub-array is X; its antenna 3 is called ANT1 and stands elsewhere.
    expect([rows.antenna1, rows.antenna2]).toEqual([
      [1, 2, 4, 2],
      [3, 3, 5, 5],
    ]);
    expect(dataset.summary.antennas).toEqual([1, 2, 3, 4, 5]);
    expect(text(dataset, "subarrays-renumbered")).toContain("in sub-array 2, 1 is 4, 3 is 5");
  });

  it("may give an antenna another number in another sub-array: by name and place it is the same", async () => {
    const second = antennaTable({
      version: 2,
      names: ["ANT2", "ANT1"],
      numbers: [1, 2],
      positions: [
        [6378000, 100, 0],
        [6378000, 0, 0],
      ],
    });
    const dataset = await withTables(antennaTable(), second, frequencyTable());
    expect(dataset.array.antennas).toHaveLength(3);
  });

  it("may stand twice with one EXTVER: the first counts, said as a fault", async () => {
    const second = antennaTable({ names: ["X", "Y", "Z"] });
    const dataset = await withTables(antennaTable(), second, frequencyTable());
    expect(dataset.array.antennas[0]!.name).toBe("ANT1");
    expect(text(dataset, "duplicate-table")).toBe(
      "two AN tables have EXTVER 1 and 1 (HDU 2 and HDU 3): HDU 2 is used",
    );
  });

  it("may lack names, numbers, diameters and positions", async () => {
    const columns: ColumnToWrite[] = [
      {
        name: "STABXYZ",
        form: "3D",
        cells: [
          [6.4e6, 0, 0],
          [6.4e6, 9, 0],
          [6.4e6, 0, 9],
        ],
      },
    ];
    const bare = await withTables(binaryTable({ name: "AN", columns }), frequencyTable());
    expect(bare.array.antennas[2]).toEqual({ number: 3, name: "3", position: [6.4e6, 0, 9], diameter: null });
    expect(codes(bare)).toEqual(["missing-antenna-numbers"]);
    const names: ColumnToWrite[] = [
      { name: "ANNAME", form: "8A", cells: ["A", "B", "C"] },
      { name: "NOSTA", form: "1J", cells: [1, 2, 3] },
    ];
    const nowhere = await withTables(binaryTable({ name: "AN", columns: names }), frequencyTable());
    expect(nowhere.array.frame).toBe("unknown");
    expect(codes(nowhere)).toEqual(["missing-antenna-positions"]);
    const other: ColumnToWrite[] = [{ name: "NOSTA", form: "1J", cells: [1] }];
    expect(
      await lineOfError(withTables(binaryTable({ name: "AN", columns: other }), frequencyTable())),
    ).toContain("HDU 2 (AN): no column STABXYZ");
  });

  it("may give numbers twice, positions that are not finite, diameters of nothing", async () => {
    const table = antennaTable({
      numbers: [1, 1, 3, 2],
      positions: [
        [6378000, 0, 0],
        [6378000, 5, 5],
        [Number.NaN, 0, 0],
        [6378000, 9, 0],
      ],
      diameters: [25, 25, 0, -1],
    });
    const dataset = await withTables(table, frequencyTable());
    expect(dataset.array.antennas).toEqual([
      { number: 1, name: "ANT1", position: [6378000, 0, 0], diameter: 25 },
      { number: 3, name: "ANT3", position: null, diameter: null },
      { number: 2, name: "ANT2", position: [6378000, 9, 0], diameter: null },
    ]);
    expect(codes(dataset)).toEqual(["antenna-twice", "table-value-not-finite"]);
  });

  it("passes over an Earth rotation rate that is none", async () => {
    const table = antennaTable({ cards: [card("DEGPDY", real(0)), card("GSTIA0", "late")] });
    const { array } = await withTables(table, frequencyTable());
    expect(array.degreesPerDay).toBe(360.98564736629);
    expect(array.siderealTimeAtReference).toBeNull();
  });
});

describe("tables that are not needed", () => {
  it("are named and skipped", async () => {
    const other = (name: string) => binaryTable({ name, columns: [{ name: "A", form: "1J", cells: [1] }] });
    const image = headerBlocks([
      card("XTENSION", "IMAGE"),
      card("BITPIX", 8),
      card("NAXIS", 0),
      card("PCOUNT", 0),
      card("GCOUNT", 1),
    ]);
    const dataset = await withTables(
      antennaTable(),
      other("LIST NX"),
      other("TABLE CL"),
      image,
      frequencyTable(),
    );
    expect(dataset.notes).toEqual([
      {
        code: "tables-skipped",
        kind: "note",
        text: "not needed and not read: LIST NX (binary table), TABLE CL (binary table), unnamed (image)",
      },
    ]);
  });
});
