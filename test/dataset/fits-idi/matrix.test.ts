import { describe, expect, it } from "vitest";
import { type AxisToWrite, card, real } from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { fileMaker } from "../group-file.ts";
import {
  AXES,
  BANDS,
  CHANNELS,
  frequency,
  geometry,
  idiFile,
  marker,
  PRODUCTS,
  primary,
  ROWS,
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

describe("the matrix", () => {
  it("is the column that TMATXn marks, or that is called FLUX", async () => {
    expect(await readAll(await open({ fluxName: "SPECTRUM" }))).toEqual(plain);
    expect(await readAll(await open({ marked: false }))).toEqual(plain);
    expect(await lineOfError(open({ marked: false, fluxName: "SPECTRUM" }))).toContain(
      "HDU 6 (UV_DATA), byte",
    );
  });

  it("may be of any numbers, scaled by TSCALn and TZEROn", async () => {
    for (const code of ["D", "J", "K"]) expect(await readAll(await open({ code }))).toEqual(plain);
    const keywords = { TSCAL: real(0.5), TZERO: real(-3) };
    for (const code of ["E", "I", "D"]) {
      const small = await open({ code, fluxKeywords: keywords, stored: (row, at) => row + 2 * at.COMPLEX! });
      const { real: re, imag, weight } = await readAll(small);
      eachSample((i, row) => {
        expect([re[i], imag[i]]).toEqual([0.5 * row - 3, 0.5 * (row + 2) - 3]);
      });
      expect(weight).toEqual(plain.weight);
    }
  });

  it("of integers flags what is undefined (TNULLn), and keeps its weight", async () => {
    const dataset = await open({
      code: "I",
      fluxKeywords: { TNULL: -32768 },
      stored: (row, at) => (row === 1 && at.FREQ === 2 && at.COMPLEX === 1 ? -32768 : 5),
    });
    const { imag, weight } = await readAll(dataset);
    eachSample((i, row, at) => {
      const lost = row === 1 && at.FREQ === 2;
      expect(imag[i]).toBe(lost ? Number.NaN : 5);
      expect(weight[i]).toBe(lost ? -plain.weight[i]! : plain.weight[i]);
    });
    expect((await readAll(dataset, { want: "weights" })).weight).toEqual(weight);
  });

  it("keeps NaN as it is", async () => {
    const { real: re, weight } = await readAll(await open({ stored: (row) => (row === 2 ? Number.NaN : 1) }));
    expect(re.filter((value) => Number.isNaN(value))).toHaveLength(BANDS * CHANNELS * PRODUCTS);
    expect(weight).toEqual(plain.weight);
  });

  it("may leave the axis values to the keywords of the table", async () => {
    const bare = (axis: AxisToWrite) => ({ ...axis, value: 0, step: 0 });
    const data = Buffer.from(uvData({ axes: USUAL_AXES.map(bare), cards: TABLE_CARDS }));
    // Blank the cards of the axes themselves.
    for (const keyword of ["CRVAL2", "CDELT2", "CRVAL3", "CDELT3", "CRPIX3"]) {
      const at = data.indexOf(keyword.padEnd(8), 0, "latin1");
      data.fill(" ", at, at + 80);
    }
    const dataset = await openDataset(file(Buffer.concat([primary, ...usualTables(), data])));
    expect(dataset.polarizations).toEqual(["LL", "RL"]);
    expect(dataset.setups[0]!.frequencies[0]).toBe(2e9 - 5e5);
  });

  const TABLE_CARDS = [
    card("STK_1", -2),
    card("REF_FREQ", real(2e9)),
    card("CHAN_BW", real(1e6)),
    card("REF_PIXL", real(1.5)),
  ];

  it("without a STOKES axis is the product that STK_1 names, or Stokes I", async () => {
    const axes = USUAL_AXES.filter(({ type }) => type !== "STOKES");
    const columns = { WEIGHT: undefined };
    const named = await open({ axes, columns, cards: [card("STK_1", -6)] });
    expect([named.polarizations, codes(named)]).toEqual([["YY"], []]);
    const unnamed = await open({ axes, columns });
    expect([unnamed.polarizations, codes(unnamed)]).toEqual([["I"], ["missing-stokes-axis"]]);
  });

  it("without a band axis is one sub-band", async () => {
    const axes = [AXES.complex, AXES.stokes, AXES.freq];
    const dataset = await open({ axes, columns: { WEIGHT: { form: "2E", cell: () => [1, 2] } } }, [
      geometry(),
      frequency({ offsets: [[5e6]] }),
    ]);
    expect(dataset.shape).toEqual({ subbands: 1, channels: 3, polarizations: 2 });
    expect([...dataset.setups[0]!.frequencies]).toEqual([1.405e9, 1.406e9, 1.407e9]);
    // No source table and no axes of the sky: a field without a place.
    expect(codes(dataset)).toEqual(["missing-source-table", "missing-phase-centre"]);
  });
});

describe("weights", () => {
  const weightsOf = async (spec: Partial<UvSpec>) => {
    const dataset = await open(spec);
    const { weight } = await readAll(dataset);
    expect((await readAll(dataset, { want: "weights", blockRows: 3 })).weight).toEqual(weight);
    return { dataset, weight };
  };
  const column = (form: string, cell: (row: number) => number | number[]) => ({
    columns: { WEIGHT: { form, cell } },
  });

  it("may be one a sub-band, or one a row", async () => {
    const bands = await weightsOf(column("2E", (row) => [row + 1, row + 11]));
    const rows = await weightsOf(column("1E", (row) => row + 1));
    eachSample((i, row, at) => {
      expect(bands.weight[i]).toBe(row + 1 + 10 * at.BAND!);
      expect(rows.weight[i]).toBe(row + 1);
    });
  });

  it("that are missing are 1, and the dataset says that it has none", async () => {
    const { dataset, weight } = await weightsOf({ columns: { WEIGHT: undefined } });
    expect(new Set(weight)).toEqual(new Set([1]));
    expect(dataset.hasWeights).toBe(false);
  });

  it("of 0 and less are flags, and what is not finite stays so", async () => {
    const { weight } = await weightsOf(
      column("1E", (row) => [0, -2, Number.NaN, Number.POSITIVE_INFINITY][row]!),
    );
    const per = BANDS * CHANNELS * PRODUCTS;
    expect([0, 1, 2, 3].map((row) => weight[row * per])).toEqual([
      0,
      -2,
      Number.NaN,
      Number.POSITIVE_INFINITY,
    ]);
  });

  it("in the matrix hold by channel, and column WEIGHT then means nothing", async () => {
    const axes = [AXES.weighted, ...USUAL_AXES.slice(1)];
    for (const spec of [{ axes }, { axes, columns: { WEIGHT: undefined } }, { axes, code: "D" }]) {
      const { dataset, weight } = await weightsOf(spec);
      eachSample((i, row, at) => {
        expect(weight[i]).toBe(marker(row, { ...at, COMPLEX: 2 }));
      });
      expect(dataset.hasWeights).toBe(true);
    }
  });

  it("may be scaled", async () => {
    const scaled = { form: "1I", cell: (row: number) => row, keywords: { TSCAL: real(0.5), TZERO: real(2) } };
    const { weight } = await weightsOf({ columns: { WEIGHT: scaled } });
    eachSample((i, row) => {
      expect(weight[i]).toBe(2 + row / 2);
    });
  });

  it("hold for every channel, however many there are", async () => {
    for (const length of [1, 63, 64, 65, 300]) {
      const axes = USUAL_AXES.map((axis) => (axis.type === "FREQ" ? { ...axis, length } : axis));
      const { weight } = await weightsOf({ axes });
      const expected = [0, 1, 2, 3].flatMap((row) =>
        [1, 3].flatMap((first) =>
          Array.from({ length: length * PRODUCTS }, (_, i) => 100 * row + first + (i % PRODUCTS)),
        ),
      );
      expect(weight).toEqual(expected);
    }
  });

  it("of another length are refused", async () => {
    expect(await lineOfError(open(column("3E", () => [1, 2, 3])))).toContain(
      "column WEIGHT holds 3 values a row: expected 4 (2 products of 2 sub-bands), 2 or 1",
    );
  });

  it("that are shares of valid data are said to be", async () => {
    expect(codes(await open({ cards: [card("WEIGHTYP", "CORRELAT")] }))).toEqual(["weights-are-fractions"]);
    expect(codes(await open({ cards: [card("WEIGHTYP", "NORMAL")] }))).toEqual([]);
  });
});
