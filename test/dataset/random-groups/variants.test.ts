/** The variants of random groups that writers produce: each reads to the same rows and samples. */
import { gzipSync } from "node:zlib";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { type AxisToWrite, card, real } from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import {
  antennaTable,
  COMPLEX,
  DAY,
  DEC,
  fileMaker,
  freq,
  frequencyTable,
  type GroupFileSpec,
  groupFile,
  marker,
  type ParameterSpec,
  parameters,
  plainSpec,
  RA,
  sourceTable,
  stokes,
  subbands,
} from "../group-file.ts";
import { type AllRows, readAll } from "../read-all.ts";

const file = fileMaker();
const open = (spec: Partial<GroupFileSpec> = {}) => openDataset(file(groupFile(spec)));
const codes = (dataset: { notes: readonly { code: string }[] }) => dataset.notes.map(({ code }) => code);

/** `plainSpec` with other parameters by name. */
function withParameters(changes: Record<string, ParameterSpec | undefined>): ParameterSpec[] {
  const all: Record<string, ParameterSpec | undefined> = { ...parameters, ...changes };
  return Object.values(all).filter((parameter) => parameter !== undefined);
}

const plain: AllRows = await readAll(await openDataset(file(groupFile())));

describe("the plain file", () => {
  it("has its rows in file order with every column", () => {
    expect(plain.antenna1).toEqual([1, 2, 1, 2]);
    expect(plain.antenna2).toEqual([3, 3, 3, 3]);
    expect(plain.time).toEqual([0.25, 0.25, 0.25 + 1 / 1024, 0.25 + 1 / 1024].map((t) => DAY + t));
    expect(plain.u).toEqual([1, 2, 3, 4].map((x) => x * 1e-9));
    expect(plain.v).toEqual([-2, -3, -4, -5].map((x) => x * 1e-9));
    expect(plain.w).toEqual([0, 0.5, 1, 1.5].map((x) => x * 1e-9));
    expect(plain.subarray).toEqual([1, 1, 1, 1]);
    expect(plain.field).toEqual([1, 1, 1, 1]);
    expect(plain.setup).toEqual([0, 0, 0, 0]);
    expect(plain.integration).toEqual([Number.NaN, Number.NaN, Number.NaN, Number.NaN]);
  });

  it("has its samples by row, sub-band, channel, polarization", () => {
    let i = 0;
    for (let row = 0; row < 4; row++) {
      for (let IF = 0; IF < 2; IF++) {
        for (let FREQ = 0; FREQ < 3; FREQ++) {
          for (let STOKES = 0; STOKES < 2; STOKES++, i++) {
            expect(plain.real[i]).toBe(marker(row, { IF, FREQ, STOKES, COMPLEX: 0 }));
            expect(plain.imag[i]).toBe(marker(row, { IF, FREQ, STOKES, COMPLEX: 1 }));
            expect(plain.weight[i]).toBe(marker(row, { IF, FREQ, STOKES, COMPLEX: 2 }));
          }
        }
      }
    }
    expect(plain.real).toHaveLength(i);
  });

  it("is described by its tables and header", async () => {
    const dataset = await open();
    expect(dataset.shape).toEqual({ subbands: 2, channels: 3, polarizations: 2 });
    expect(dataset.polarizations).toEqual(["RR", "LL"]);
    expect([...dataset.setups[0]!.frequencies]).toEqual([1.4e9, 1.401e9, 1.402e9, 1.5e9, 1.501e9, 1.502e9]);
    expect([...dataset.setups[0]!.channelWidths]).toEqual([1e6, 1e6]);
    expect(dataset.fields).toEqual([
      {
        id: 1,
        name: "Field A",
        rightAscension: 123.5 * (Math.PI / 180),
        declination: -30.25 * (Math.PI / 180),
        equinox: 2000,
      },
    ]);
    expect(dataset.array).toMatchObject({
      name: "Ridge",
      frame: "geocentric",
      fromTable: true,
      referenceDay: DAY,
    });
    expect(dataset.array.antennas[1]).toEqual({
      number: 2,
      name: "ANT2",
      position: [6378000, 100, 0],
      diameter: 25,
    });
    expect(dataset.header).toEqual({ telescope: "Invented", object: "Field A", observed: "2024-06-15" });
    expect([dataset.unit, dataset.hasWeights, dataset.rows, dataset.format]).toEqual([
      "Jy",
      true,
      4,
      "random-groups",
    ]);
    expect(codes(dataset)).toEqual([]);
  });
});

describe("the axes", () => {
  const axes = plainSpec.axes;

  it("may come in any order", async () => {
    await fc.assert(
      fc.asyncProperty(fc.shuffledSubarray([...axes], { minLength: axes.length }), async (shuffled) => {
        const all = await readAll(await open({ axes: shuffled }));
        expect(all).toEqual(plain);
      }),
      { numRuns: 40 },
    );
  });

  it("may come in any order with every item type, with weights alone, too", async () => {
    const bitpix = fc.constantFrom(16, 32, 64, -32, -64) as fc.Arbitrary<GroupFileSpec["bitpix"]>;
    await fc.assert(
      fc.asyncProperty(
        fc.shuffledSubarray([...axes], { minLength: axes.length }),
        bitpix,
        async (shuffled, kind) => {
          // Integers cannot hold the plain file's times and coordinates: compare the samples.
          const spec = { axes: shuffled, bitpix: kind };
          const { real: re, imag, weight } = await readAll(await open(spec));
          expect({ re, imag, weight }).toEqual({ re: plain.real, imag: plain.imag, weight: plain.weight });
          const alone = await readAll(await open(spec), { want: "weights" });
          expect(alone.weight).toEqual(plain.weight);
          expect(alone.real).toEqual([]);
        },
      ),
      { numRuns: 30 },
    );
  });

  it("need no IF axis, and no name on an axis of length 1", async () => {
    const one = [COMPLEX, stokes(2), freq(3)];
    const tables = [antennaTable()];
    const without = await readAll(await open({ axes: one, tables }));
    const unnamed = await readAll(
      await open({ axes: [...one, { type: "", length: 1, value: 0, step: 0 }, RA, DEC], tables }),
    );
    expect(without.real).toEqual(unnamed.real);
    expect(without.real).toHaveLength(24);
  });

  it("take FREQ, RA and DEC with anything behind a dash", async () => {
    const spelled: AxisToWrite[] = [
      COMPLEX,
      stokes(2),
      { ...freq(3), type: "FREQ-LSR" },
      subbands(2),
      { ...RA, type: "RA---SIN" },
      { ...DEC, type: "DEC--SIN" },
    ];
    const stored: GroupFileSpec["stored"] = (row, at) => marker(row, { ...at, FREQ: at["FREQ-LSR"]! });
    const dataset = await open({ axes: spelled, stored });
    expect((await readAll(dataset)).real).toEqual(plain.real);
    expect(dataset.fields[0]!.declination).toBeCloseTo(-30.25 * (Math.PI / 180), 15);
  });

  // FITS Standard 4.0, table 29.
  it.each([
    [1, 1, 4, ["I", "Q", "U", "V"]],
    [1, 1, 1, ["I"]],
    [-1, -1, 4, ["RR", "LL", "RL", "LR"]],
    [-5, -1, 4, ["XX", "YY", "XY", "YX"]],
    [-6, 1, 2, ["YY", "XX"]],
    [-2, -1, 1, ["LL"]],
    [-2, -2, 2, ["LL", "LR"]],
  ])("read STOKES from %i by %i as %s products", async (value, step, length, names) => {
    const dataset = await open({
      axes: [COMPLEX, stokes(length, value, step), freq(3), subbands(2), RA, DEC],
    });
    expect(dataset.polarizations).toEqual(names);
    expect(dataset.shape.polarizations).toBe(length);
  });

  it("may lack STOKES: then it is Stokes I, said in a note", async () => {
    const dataset = await open({ axes: [COMPLEX, freq(3), subbands(2), RA, DEC] });
    expect(dataset.polarizations).toEqual(["I"]);
    expect(codes(dataset)).toContain("missing-stokes-axis");
  });

  it("may lack RA and DEC: then the pointing stands in, or the centre is unknown", async () => {
    const bare = [COMPLEX, stokes(2), freq(3), subbands(2)];
    const cards = [card("OBSRA", real(10)), card("OBSDEC", real(-20)), card("EPOCH", real(1950))];
    const pointed = await open({ axes: bare, cards });
    expect(pointed.fields[0]).toMatchObject({ name: "source 1", equinox: 1950 });
    expect(pointed.fields[0]!.rightAscension).toBeCloseTo(Math.PI / 18, 15);
    const lost = await open({ axes: bare, cards: [] });
    expect(lost.fields[0]!.rightAscension).toBeNaN();
    expect(codes(lost)).toContain("missing-phase-centre");
  });
});

describe("the item type", () => {
  it("may be a scaled integer, with BLANK for undefined", async () => {
    const dataset = await open({
      bitpix: 16,
      cards: [card("BSCALE", real(0.5)), card("BZERO", real(100)), card("BLANK", -32768)],
      stored: (row, at) => (row === 0 && at.COMPLEX === 0 ? -32768 : at.COMPLEX === 2 ? 10 : -7),
    });
    const all = await readAll(dataset);
    expect(all.real.slice(0, 12)).toEqual(Array(12).fill(Number.NaN));
    expect(all.real.slice(12)).toEqual(Array(36).fill(96.5));
    expect(all.imag).toEqual(Array(48).fill(96.5));
    expect(all.weight).toEqual(Array(48).fill(105));
  });

  it("scales parameters by PSCAL and PZERO alone, the array by BSCALE and BZERO alone", async () => {
    const dataset = await open({
      cards: [card("BSCALE", real(2)), card("BZERO", real(1))],
    });
    const all = await readAll(dataset);
    expect(all.u).toEqual(plain.u);
    expect(all.real).toEqual(plain.real.map((value) => 1 + 2 * value));
  });

  it("passes over BLANK in floating point, where NaN means undefined", async () => {
    const all = await readAll(
      await open({
        cards: [card("BLANK", 1)],
        stored: (row, at) => (row === 1 && at.COMPLEX === 1 ? Number.NaN : 1),
      }),
    );
    expect(all.real).toEqual(Array(48).fill(1));
    expect(all.imag.slice(12, 24)).toEqual(Array(12).fill(Number.NaN));
  });

  it("turns float64 beyond float32 into infinity, and keeps a tiny weight positive", async () => {
    const values = [1e300, -1e300, 1e-60];
    const all = await readAll(await open({ bitpix: -64, stored: (_, at) => values[at.COMPLEX!]! }));
    expect(all.real[0]).toBe(Number.POSITIVE_INFINITY);
    expect(all.imag[0]).toBe(Number.NEGATIVE_INFINITY);
    expect(all.weight[0]).toBe(2 ** -149);
  });

  it("keeps infinite weights, negative weights and zeros as they are", async () => {
    const weights = [Number.POSITIVE_INFINITY, -2.5, 0, Number.NaN];
    const all = await readAll(await open({ stored: (row, at) => (at.COMPLEX === 2 ? weights[row]! : 0) }));
    weights.forEach((weight, row) => {
      expect(all.weight.slice(row * 12, row * 12 + 12)).toEqual(Array(12).fill(weight));
    });
  });
});

describe("a COMPLEX axis of length 2", () => {
  const short: AxisToWrite = { ...COMPLEX, length: 2 };
  const axes = [short, ...plainSpec.axes.slice(1)];

  it("has unit weights without a WEIGHT parameter, and says so", async () => {
    const dataset = await open({ axes });
    const all = await readAll(dataset);
    expect(dataset.hasWeights).toBe(false);
    expect(all.real).toEqual(plain.real);
    expect(all.weight).toEqual(Array(48).fill(1));
  });

  it("takes weight and scale of the group from its parameters; a reserved value is a flag", async () => {
    const dataset = await open({
      axes,
      bitpix: 16,
      parameters: withParameters({
        weight: { name: "WEIGHT", scale: 0.5, stored: (row) => row + 1 },
        scale: { name: "SCALE", scale: 0.25, stored: () => 2 },
      }),
      stored: (row, at) => (row === 2 && at.FREQ === 1 ? -32768 : 10 * (at.COMPLEX! + 1)),
    });
    const all = await readAll(dataset);
    expect(dataset.hasWeights).toBe(true);
    expect(all.real.slice(0, 3)).toEqual([5, 5, 5]);
    expect(all.imag.slice(0, 3)).toEqual([10, 10, 10]);
    expect(all.weight.slice(0, 1).concat(all.weight.slice(12, 13))).toEqual([0.5, 1]);
    const third = 24;
    expect(all.weight.slice(third, third + 4)).toEqual([1.5, 1.5, -1.5, -1.5]);
    expect(all.real.slice(third + 2, third + 4)).toEqual([Number.NaN, Number.NaN]);
    expect((await readAll(dataset, { want: "weights" })).weight).toEqual(all.weight);
  });
});

describe("u, v and w", () => {
  it.each(["UU", "UU--", "UU---SIN", "UU---NCP", "uu"])("are seconds under the name %s", async (name) => {
    const uu = { ...parameters.uu!, name };
    expect((await readAll(await open({ parameters: withParameters({ uu }) }))).u).toEqual(plain.u);
  });

  it("are wavelengths at the reference frequency under a name with L", async () => {
    const wavelengths = (p: ParameterSpec, name: string) => ({ ...p, name, scale: p.scale! * 1.4e9 });
    const all = await readAll(
      await open({
        parameters: withParameters({
          uu: wavelengths(parameters.uu!, "UU-L-SIN"),
          vv: wavelengths(parameters.vv!, "VV-L"),
          ww: wavelengths(parameters.ww!, "WW-L-NCP"),
        }),
      }),
    );
    all.u.forEach((u, i) => {
      expect(u).toBeCloseTo(plain.u[i]!, 20);
    });
    all.w.forEach((w, i) => {
      expect(w).toBeCloseTo(plain.w[i]!, 20);
    });
  });

  it("are summed where a name is repeated, in float64", async () => {
    const all = await readAll(
      await open({
        parameters: [
          ...plainSpec.parameters,
          { name: "UU---SIN", scale: 1e-12, zero: 5e-10, stored: (row: number) => row },
        ],
      }),
    );
    all.u.forEach((u, row) => {
      expect(u).toBeCloseTo((row + 1) * 1e-9 + 5e-10 + row * 1e-12, 22);
    });
  });

  it("may lack w, said as a fault", async () => {
    const dataset = await open({ parameters: withParameters({ ww: undefined }) });
    expect((await readAll(dataset)).w).toEqual([0, 0, 0, 0]);
    expect(codes(dataset)).toContain("missing-w");
  });

  it("that are not finite are counted in a note", async () => {
    const uu = { ...parameters.uu!, stored: (row: number) => (row === 2 ? Number.NaN : row) };
    expect(codes(await open({ parameters: withParameters({ uu }) }))).toContain("uvw-not-finite");
  });
});

describe("the time", () => {
  const jd = DAY + 2400000.5;

  it.each<[string, ParameterSpec[]]>([
    ["day as zero point, fraction second", [parameters.date!, parameters.date2!]],
    ["fraction first", [parameters.date2!, parameters.date!]],
    ["day stored, fraction second", [{ name: "DATE", stored: () => jd }, parameters.date2!]],
    ["fraction first, day stored", [parameters.date2!, { name: "DATE", stored: () => jd }]],
    ["one parameter", [{ ...parameters.date2!, zero: jd }]],
  ])("is the sum of its DATE parameters: %s", async (_, dates) => {
    const others = plainSpec.parameters.filter(({ name }) => name !== "DATE");
    expect((await readAll(await open({ bitpix: -64, parameters: [...others, ...dates] }))).time).toEqual(
      plain.time,
    );
  });

  it("keeps a fraction of a day to a microsecond beside the Julian day, in any order", async () => {
    const fraction = 0.123456789012;
    const both = [
      { name: "DATE", stored: () => jd },
      { name: "DATE", stored: () => fraction },
    ];
    for (const dates of [both, both.toReversed()]) {
      const others = plainSpec.parameters.filter(({ name }) => name !== "DATE");
      const { time } = await readAll(await open({ bitpix: -64, parameters: [...others, ...dates] }));
      // A double resolves 0.6 us at this MJD.
      expect(Math.abs(time[0]! - (DAY + fraction)) * 86400).toBeLessThan(1e-6);
    }
  });

  it("is UTC, whatever system the antenna table names", async () => {
    const atomic = (...cards: ReturnType<typeof card>[]) => [
      antennaTable({ cards: [card("RDATE", "15/06/24"), ...cards] }),
      frequencyTable(),
    ];
    const tai = await open({ tables: atomic(card("TIMSYS", "IAT"), card("DATUTC", real(37))) });
    expect((await readAll(tai)).time[0]).toBeCloseTo(DAY + 0.25 - 37 / 86400, 9);
    const other = await open({
      tables: atomic(card("TIMESYS", "TAI"), card("DATUTC", real(0)), card("IATUTC", real(37))),
    });
    expect((await readAll(other)).time[0]).toBeCloseTo(DAY + 0.25 - 37 / 86400, 9);
    // UTC files give the offset of atomic time, too: it is not applied.
    const utc = await open({ tables: atomic(card("TIMSYS", "UTC"), card("IATUTC", real(37))) });
    expect((await readAll(utc)).time).toEqual(plain.time);
    const unknown = await open({ tables: atomic(card("TIMSYS", "IAT")) });
    expect(codes(unknown)).toContain("missing-time-offset");
  });

  it("refers the sidereal time to UTC as it does the rows", async () => {
    const cards = [
      card("RDATE", "2024-06-15"),
      card("GSTIA0", real(263.5)),
      card("DEGPDY", real(361)),
      card("TIMSYS", "IAT"),
      card("DATUTC", real(37)),
    ];
    const { array } = await open({ tables: [antennaTable({ cards }), frequencyTable()] });
    expect(array.siderealTimeAtReference).toBeCloseTo(263.5 + (361 * 37) / 86400, 10);
    expect(array.timeSystem).toBe("IAT");
  });

  it("that is not finite is NaN and noted", async () => {
    const date2 = {
      ...parameters.date2!,
      stored: (row: number) => (row === 3 ? Number.POSITIVE_INFINITY : 0),
    };
    const dataset = await open({ parameters: withParameters({ date2 }) });
    expect((await readAll(dataset)).time[3]).toBeNaN();
    expect(codes(dataset)).toContain("time-not-finite");
  });
});

describe("the antennas", () => {
  const withCode = async (stored: (row: number) => number) =>
    readAll(
      await open({ bitpix: -64, parameters: withParameters({ baseline: { name: "BASELINE", stored } }) }),
    );

  it("come from 256-based and 2048-based codes, with the sub-array", async () => {
    const all = await withCode((row) => [258.01, 6940, 67586, 680237.03][row]!);
    expect(all.antenna1).toEqual([1, 27, 1, 300]);
    expect(all.antenna2).toEqual([2, 28, 2, 301]);
    expect(all.subarray).toEqual([2, 1, 1, 4]);
  });

  it("come from ANTENNA1, ANTENNA2 and SUBARRAY, where there is no code", async () => {
    const dataset = await open({
      parameters: withParameters({
        baseline: undefined,
        one: { name: "ANTENNA1", stored: (row) => 1000 + row },
        two: { name: "ANTENNA2", stored: () => 3000 },
        sub: { name: "SUBARRAY", stored: () => 2 },
      }),
    });
    const all = await readAll(dataset);
    expect(all.antenna1).toEqual([1000, 1001, 1002, 1003]);
    expect(all.antenna2).toEqual([3000, 3000, 3000, 3000]);
    expect(all.subarray).toEqual([2, 2, 2, 2]);
  });

  it("are called by NOSTA, not by the row of the table", async () => {
    const dataset = await open({ tables: [antennaTable({ numbers: [3, 1, 2] }), frequencyTable()] });
    expect(dataset.array.antennas.map(({ number, name }) => [number, name])).toEqual([
      [3, "ANT3"],
      [1, "ANT1"],
      [2, "ANT2"],
    ]);
  });

  it("that the table does not have are added and said", async () => {
    const dataset = await open({ tables: [antennaTable({ numbers: [1, 2, 9] }), frequencyTable()] });
    expect(dataset.array.antennas.map(({ number }) => number)).toEqual([1, 2, 9, 3]);
    expect(dataset.notes).toEqual([
      {
        code: "antenna-not-in-table",
        kind: "fault",
        text: "rows name antenna 3, which the antenna table does not have",
      },
    ]);
  });

  it("are those met in the rows where there is no table", async () => {
    const dataset = await open({ tables: [frequencyTable()] });
    expect(dataset.array).toMatchObject({ fromTable: false, frame: "unknown", referenceDay: null });
    expect(dataset.array.antennas.map(({ number, name }) => [number, name])).toEqual([
      [1, "1"],
      [2, "2"],
      [3, "3"],
    ]);
    expect(codes(dataset)).toEqual(["missing-antenna-table"]);
  });
});

describe("other columns", () => {
  it("are integration time, field and frequency setup", async () => {
    const dataset = await open({
      parameters: withParameters({
        inttim: { name: "INTTIM", scale: 0.5, stored: (row) => row },
        source: { name: "SOURCE", stored: (row) => (row < 2 ? 7 : 9) },
        freqsel: { name: "FREQSEL", stored: (row) => (row === 3 ? 5 : 2) },
        junk: { name: "GATEID", stored: () => Number.NaN },
        unnamed: { name: "", stored: () => 1 },
      }),
      tables: [
        antennaTable(),
        frequencyTable({ ids: [2, 5] }),
        sourceTable([
          { id: 7, name: "Calibrator", ra: 10, dec: 20, epoch: 1950 },
          { id: 9, name: "Target", ra: 350, dec: -80 },
        ]),
      ],
    });
    const all = await readAll(dataset);
    expect(all.integration).toEqual([Number.NaN, 0.5, 1, 1.5]);
    expect(all.field).toEqual([7, 7, 9, 9]);
    expect(all.setup).toEqual([0, 0, 0, 1]);
    expect(dataset.fields.map(({ id, name, equinox }) => [id, name, equinox])).toEqual([
      [7, "Calibrator", 1950],
      [9, "Target", 2000],
    ]);
    expect(dataset.setups.map(({ id }) => id)).toEqual([2, 5]);
    expect(codes(dataset)).toEqual([]);
  });
});

describe("packing", () => {
  it("in gzip changes nothing", async () => {
    const packed = await openDataset(file(gzipSync(groupFile()), "packed.uvfits.gz"));
    expect(await readAll(packed)).toEqual(plain);
    expect(await readAll(packed, { want: "samples", rows: [1, 3] })).toMatchObject({
      real: plain.real.slice(12, 36),
    });
    expect(packed.name).toMatch(/^\d+-packed$/);
    expect(packed.array.antennas).toHaveLength(3);
  });
});
