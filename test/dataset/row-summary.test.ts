import { describe, expect, it } from "vitest";
import { openDataset } from "../../src/dataset/open.ts";
import { summarizeRows } from "../../src/dataset/row-summary.ts";
import { SPEED_OF_LIGHT } from "../../src/util/constants.ts";
import { DAY, fileMaker, groupFile, type ParameterSpec, parameters } from "./group-file.ts";
import { lineOfError } from "./read-all.ts";

const file = fileMaker();

/** A dataset of float64 rows with other stored values of some parameters, and more parameters. */
function opened(
  rows: number,
  changes: Record<string, (row: number) => number> = {},
  extra: ParameterSpec[] = [],
) {
  const changed = Object.entries(parameters).map(([key, parameter]) => {
    const stored = changes[key];
    return stored === undefined ? parameter : { ...parameter, stored };
  });
  return openDataset(file(groupFile({ bitpix: -64, rows, parameters: [...changed, ...extra] })));
}

describe("summarizeRows", () => {
  it("counts times, antennas, baselines and fields", async () => {
    const { summary } = await opened(6, {
      baseline: (row) => [258, 259, 515, 513, 258, 257][row]!,
      date2: (row) => Math.floor(row / 4) / 4,
    });
    expect(summary).toMatchObject({
      rows: 6,
      firstTime: DAY,
      lastTime: DAY + 0.25,
      times: 2,
      antennas: [1, 2, 3],
      subarrays: [1],
      // 1-2 and 2-1 are one baseline.
      baselines: 3,
      autocorrelations: 1,
      fields: [{ id: 1, rows: 6 }],
      setups: [{ index: 0, rows: 6 }],
    });
  });

  it("gives the shortest and longest spacing between different antennas", async () => {
    const { summary } = await opened(3, {
      uu: (row) => [0, 3, 300][row]!,
      vv: (row) => [0, -4, 400][row]!,
      baseline: (row) => (row === 0 ? 257 : 258),
    });
    expect(summary.shortestSpacing).toBeCloseTo(5e-9, 20);
    expect(summary.longestSpacing * SPEED_OF_LIGHT).toBeCloseTo(500e-9 * SPEED_OF_LIGHT, 9);
    expect(summary.wAllZero).toBe(false);
  });

  it("tells that every w is zero, and counts coordinates and times that are not finite", async () => {
    const { summary } = await opened(4, {
      ww: () => 0,
      uu: (row) => (row === 1 ? Number.NaN : 1),
      date2: (row) => (row === 2 ? Number.NaN : 0),
    });
    expect(summary).toMatchObject({ wAllZero: true, rowsWithoutUvw: 1, rowsWithoutTime: 1, times: 1 });
  });

  it("gives the range of integration times, NaN where none is given", async () => {
    const inttim = { name: "INTTIM", stored: (row: number) => [0, 10, 0.5, 3][row]! };
    const { summary } = await opened(4, {}, [inttim]);
    expect([summary.shortestIntegration, summary.longestIntegration]).toEqual([0.5, 10]);
    expect((await opened(4)).summary.shortestIntegration).toBeNaN();
  });

  it("keeps rows from all over the file to ask questions of", async () => {
    const { summary } = await opened(1000);
    expect(summary.probe).toHaveLength(250);
    expect(summary.probe.slice(0, 3).map(({ u }) => Math.round(u * 1e9))).toEqual([1, 5, 9]);
  });

  it("is the same whatever the blocks, and reports progress in rows", async () => {
    const dataset = await opened(50);
    let seen = 0;
    const small = { rows: 50, blocks: () => dataset.blocks({ want: "rows", blockRows: 7 }) };
    const summary = await summarizeRows(small, (rows) => {
      seen += rows;
    });
    expect(summary).toEqual(dataset.summary);
    expect(seen).toBe(50);
  });

  it("refuses field numbers without end", async () => {
    const source = { name: "SOURCE", stored: (row: number) => row };
    const bytes = opened(66_000, {}, [source]);
    expect(await lineOfError(bytes)).toContain("the rows name more than 65536 fields");
  });
});
