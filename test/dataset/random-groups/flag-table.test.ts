/** The flag table: flags that are not in the weights. */
import { describe, expect, it } from "vitest";
import { binaryTable } from "../../../src/dataset/fits/write.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { antennaTable, fileMaker, frequencyTable, groupFile } from "../group-file.ts";
import { readAll } from "../read-all.ts";

const file = fileMaker();
const withTables = (...tables: Uint8Array[]) => openDataset(file(groupFile({ tables })));

describe("the flag table", () => {
  interface Entry {
    source?: number;
    ants?: [number, number];
    times?: [number, number];
    ifs?: [number, number];
    chans?: [number, number];
    products?: boolean[];
    subarray?: number;
    setup?: number;
  }
  const flagTable = (entries: readonly Entry[], version = 1) =>
    binaryTable({
      name: "LIST FG",
      version,
      columns: [
        { name: "SOURCE", form: "1J", cells: entries.map(({ source }) => source ?? 0) },
        { name: "SUBARRAY", form: "1J", cells: entries.map(({ subarray }) => subarray ?? 0) },
        { name: "FREQ ID", form: "1J", cells: entries.map(({ setup }) => setup ?? -1) },
        { name: "ANTS", form: "2J", cells: entries.map(({ ants }) => ants ?? [0, 0]) },
        { name: "TIME RANGE", form: "2E", cells: entries.map(({ times }) => times ?? [0, 0]) },
        { name: "IFS", form: "2J", cells: entries.map(({ ifs }) => ifs ?? [0, 0]) },
        { name: "CHANS", form: "2J", cells: entries.map(({ chans }) => chans ?? [0, 0]) },
        {
          name: "PFLAGS",
          form: "4X",
          cells: entries.map(({ products }) => products ?? [true, true, true, true]),
        },
        { name: "REASON", form: "24A", cells: entries.map(() => "a test") },
      ],
    });

  /** Rows, sub-bands, channels and products of the flagged samples, as "row.subband.channel.product". */
  async function flagged(...entries: Entry[]): Promise<string[]> {
    const dataset = await withTables(antennaTable(), frequencyTable(), flagTable(entries));
    const { weight } = await readAll(dataset, { want: "weights", blockRows: 3 });
    expect(weight).toEqual((await readAll(dataset)).weight);
    return weight.flatMap((value, i) =>
      value > 0 ? [] : [`${Math.floor(i / 12)}.${Math.floor(i / 6) % 2}.${Math.floor(i / 2) % 3}.${i % 2}`],
    );
  }

  it("flags an antenna, a baseline either way round, all for 0", async () => {
    expect(
      await flagged({ ants: [2, 0], ifs: [1, 1], chans: [1, 1], products: [true, false, false, false] }),
    ).toEqual(["1.0.0.0", "3.0.0.0"]);
    expect(await flagged({ ants: [3, 1], ifs: [2, 2], chans: [3, 3] })).toEqual([
      "0.1.2.0",
      "0.1.2.1",
      "2.1.2.0",
      "2.1.2.1",
    ]);
    expect(await flagged({ ants: [1, 2] })).toEqual([]);
    expect(await flagged({})).toHaveLength(48);
  });

  it("flags channel and sub-band ranges, a last 0 to the end", async () => {
    const first = { ants: [1, 0] as [number, number], times: [0.2, 0.25] as [number, number] };
    expect(
      await flagged({ ...first, ifs: [2, 0], chans: [3, 0], products: [false, true, false, false] }),
    ).toEqual(["0.1.2.1"]);
    expect(await flagged({ ...first, ifs: [2, 99], chans: [9, 9] })).toEqual([]);
  });

  it("flags time ranges from the reference day, both ends included", async () => {
    const one = {
      ifs: [1, 1] as [number, number],
      chans: [1, 1] as [number, number],
      products: [true, false, false, false],
    };
    expect(await flagged({ ...one, times: [0.25, 0.2505] })).toEqual(["0.0.0.0", "1.0.0.0"]);
    expect(await flagged({ ...one, times: [0.2501, 0.25 + 1 / 1024] })).toEqual(["2.0.0.0", "3.0.0.0"]);
    expect(await flagged({ ...one, times: [0.26, 0.3] }, { ...one, times: [0.1, 0.24] })).toEqual([]);
  });

  it("flags by source, sub-array and setup", async () => {
    expect(await flagged({ source: 2 }, { subarray: 2 }, { setup: 2 })).toEqual([]);
    expect(await flagged({ source: 1, subarray: 1, setup: 1 })).toHaveLength(48);
  });

  it("keeps what the weight was, and says how many entries count", async () => {
    const dataset = await withTables(antennaTable(), frequencyTable(), flagTable([{}]));
    const { weight } = await readAll(dataset);
    expect(weight[0]).toBe(-3);
    expect(dataset.notes).toEqual([
      { code: "flag-table-applied", kind: "note", text: "applied as flags: 1 entry of the flag table (FG)" },
    ]);
  });

  it("of the highest version counts", async () => {
    const dataset = await withTables(
      antennaTable(),
      frequencyTable(),
      flagTable([{}], 1),
      flagTable([{ ants: [1, 0] }], 2),
    );
    expect((await readAll(dataset)).weight.filter((w) => w < 0)).toHaveLength(24);
  });

  it("with times and no reference date is left out, said as a fault", async () => {
    const antennas = antennaTable({ cards: [] });
    const dataset = await withTables(antennas, frequencyTable(), flagTable([{ times: [0.1, 0.9] }]));
    expect((await readAll(dataset)).weight.filter((w) => w < 0)).toEqual([]);
    expect(dataset.notes.map(({ code }) => code)).toEqual(["flag-table-undated"]);
    expect(dataset.array.referenceDay).toBeNull();
  });
});
