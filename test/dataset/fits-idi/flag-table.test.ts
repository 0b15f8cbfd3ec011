/** The FLAG table: flags that are not in the weights. */
import { describe, expect, it } from "vitest";
import { binaryTable, type CardToWrite, card } from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { DAY, fileMaker } from "../group-file.ts";
import { COLUMNS, GEOMETRY_CARDS, geometry, idiFile, type UvSpec, usualTables } from "../idi-file.ts";
import { readAll } from "../read-all.ts";

interface Entry {
  source?: number;
  array?: number;
  ants?: [number, number];
  setup?: number;
  times?: [number, number];
  bands?: [number, number];
  chans?: [number, number];
  products?: [number, number, number, number];
  severity?: number;
}

const file = fileMaker();

function flagTable(entries: readonly Entry[], cards: readonly CardToWrite[] = [], version = 1): Uint8Array {
  return binaryTable({
    name: "FLAG",
    version,
    cards,
    columns: [
      { name: "SOURCE_ID", form: "1J", cells: entries.map(({ source }) => source ?? 0) },
      { name: "ARRAY", form: "1J", cells: entries.map(({ array }) => array ?? 0) },
      { name: "ANTS", form: "2J", cells: entries.map(({ ants }) => ants ?? [0, 0]) },
      { name: "FREQID", form: "1J", cells: entries.map(({ setup }) => setup ?? -1) },
      { name: "TIMERANG", form: "2E", cells: entries.map(({ times }) => times ?? [0, 0]) },
      { name: "BANDS", form: "2J", cells: entries.map(({ bands }) => bands ?? [1, 1]) },
      { name: "CHANS", form: "2J", cells: entries.map(({ chans }) => chans ?? [0, 0]) },
      { name: "PFLAGS", form: "4J", cells: entries.map(({ products }) => products ?? [1, 1, 1, 1]) },
      { name: "REASON", form: "24A", cells: entries.map(() => "a test") },
      { name: "SEVERITY", form: "1J", cells: entries.map(({ severity }) => severity ?? -1) },
    ],
  });
}

const open = (spec: Partial<UvSpec>, ...tables: Uint8Array[]) =>
  openDataset(file(idiFile(spec, [...usualTables(), ...tables])));

/** Rows, sub-bands, channels and products of the flagged samples, as "row.subband.channel.product". */
async function flaggedOf(dataset: Awaited<ReturnType<typeof open>>): Promise<string[]> {
  const { weight } = await readAll(dataset, { want: "weights", blockRows: 3 });
  expect(weight).toEqual((await readAll(dataset)).weight);
  return weight.flatMap((value, i) =>
    value > 0 ? [] : [`${Math.floor(i / 12)}.${Math.floor(i / 6) % 2}.${Math.floor(i / 2) % 3}.${i % 2}`],
  );
}
const flagged = async (...entries: Entry[]) => flaggedOf(await open({}, flagTable(entries)));

/** Of the first sub-band, channel and product. */
const corner = { bands: [1, 0], chans: [1, 1], products: [1, 0, 0, 0] } satisfies Entry;

describe("an entry of the flag table", () => {
  it("flags an antenna on either side, or one baseline either way round; zeros are all", async () => {
    expect(await flagged({ ...corner, ants: [2, 0] })).toEqual(["1.0.0.0", "3.0.0.0"]);
    expect(await flagged({ ...corner, ants: [0, 2] })).toEqual(["1.0.0.0", "3.0.0.0"]);
    expect(await flagged({ ...corner, ants: [3, 1] })).toEqual(["0.0.0.0", "2.0.0.0"]);
    expect(await flagged({ ...corner, ants: [1, 2] })).toEqual([]);
    expect(await flagged({})).toHaveLength(48);
  });

  it("flags the sub-bands that BANDS marks, each by its own number", async () => {
    const one = { ants: [1, 0], times: [0.2, 0.25], chans: [3, 3], products: [0, 1, 0, 0] } satisfies Entry;
    expect(await flagged({ ...one, bands: [0, 1] })).toEqual(["0.1.2.1"]);
    expect(await flagged({ ...one, bands: [1, 0] })).toEqual(["0.0.2.1"]);
    expect(await flagged({ ...one, bands: [1, 1] })).toEqual(["0.0.2.1", "0.1.2.1"]);
  });

  it("with no sub-band marked flags nothing, said as a fault", async () => {
    const dataset = await open({}, flagTable([{ bands: [0, 0] }, corner]));
    expect(await flaggedOf(dataset)).toHaveLength(4);
    expect(dataset.notes.map(({ code, text }) => [code, text])).toEqual([
      [
        "flag-table-without-bands",
        "1 entry of the flag table (FLAG) with BANDS all 0: taken to flag nothing, though some writers mean every sub-band",
      ],
      ["flag-table-applied", "applied as flags: 1 entry of the flag table (FLAG)"],
    ]);
  });

  it("flags a range of channels, a last 0 to the end", async () => {
    const one = { ...corner, ants: [1, 0], times: [0.2, 0.25] } satisfies Entry;
    expect(await flagged({ ...one, chans: [2, 0] })).toEqual(["0.0.1.0", "0.0.2.0"]);
    expect(await flagged({ ...one, chans: [2, 99] })).toEqual(["0.0.1.0", "0.0.2.0"]);
    expect(await flagged({ ...one, chans: [9, 9] })).toEqual([]);
  });

  it("flags the products that PFLAGS marks, in the order of the STOKES axis", async () => {
    const one = { ...corner, ants: [1, 0], times: [0.2, 0.25] } satisfies Entry;
    expect(await flagged({ ...one, products: [0, 1, 0, 0] })).toEqual(["0.0.0.1"]);
    expect(await flagged({ ...one, products: [0, 0, 1, 1] })).toEqual([]);
  });

  it("flags times from 0h of the reference day, both ends included, (0, 0) all", async () => {
    expect(await flagged({ ...corner, times: [0.25, 0.2505] })).toEqual(["0.0.0.0", "1.0.0.0"]);
    expect(await flagged({ ...corner, times: [0.2501, 0.25 + 1 / 1024] })).toEqual(["2.0.0.0", "3.0.0.0"]);
    expect(await flagged({ ...corner, times: [0.26, 0.3] }, { ...corner, times: [0.1, 0.24] })).toEqual([]);
  });

  // Float32 holds 0.3 day as 0.30000001192, 1 ms late; the widening by one step (3e-8 day at 0.3) takes it in.
  it("takes in an integration that the rounding of its time range would leave out", async () => {
    const late = { columns: { TIME: { ...COLUMNS.TIME!, cell: () => 0.3 } } };
    expect(Math.fround(0.3)).toBeGreaterThan(0.3);
    expect(await flaggedOf(await open(late, flagTable([{ ...corner, times: [0.3, 0.4] }])))).toHaveLength(4);
  });

  it("flags by source, array and setup", async () => {
    expect(await flagged({ source: 2 }, { array: 2 }, { setup: 2 })).toEqual([]);
    expect(await flagged({ source: 1, array: 1, setup: 1 })).toHaveLength(48);
  });

  it("counts whatever its severity, and keeps what the weight was", async () => {
    for (const severity of [-1, 0, 1, 2]) {
      const dataset = await open({}, flagTable([{ ...corner, severity }]));
      const { weight } = await readAll(dataset);
      expect(weight.filter((value) => value < 0)).toEqual([-1, -101, -201, -301]);
    }
  });
});

describe("flag tables", () => {
  it("count together, wherever they stand", async () => {
    const two = [flagTable([{ ...corner, ants: [1, 0] }]), flagTable([{ ...corner, ants: [2, 0] }], [], 2)];
    expect(await flaggedOf(await open({}, ...two))).toHaveLength(4);
  });

  it("count times from their own RDATE, or that of the array", async () => {
    const entry = { ...corner, times: [1.25, 1.2505] } satisfies Entry;
    const own = await open({}, flagTable([entry], [card("RDATE", "2024-06-14")]));
    expect(await flaggedOf(own)).toEqual(["0.0.0.0", "1.0.0.0"]);
    expect(await flagged(entry)).toEqual([]);
  });

  it("with times and no reference date are left out, said as a fault", async () => {
    const cards = GEOMETRY_CARDS.filter(({ keyword }) => keyword !== "RDATE");
    const [, ...others] = usualTables();
    const tables = [geometry({ cards }), ...others, flagTable([{ times: [0.1, 0.9] }])];
    const dataset = await openDataset(file(idiFile({}, tables)));
    expect(await flaggedOf(dataset)).toEqual([]);
    expect(dataset.notes.map(({ code }) => code)).toEqual(["flag-table-undated"]);
    expect((await readAll(dataset)).time[0]).toBe(DAY + 0.25);
  });
});
