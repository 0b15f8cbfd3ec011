import { describe, expect, it } from "vitest";
import type { Dataset } from "../../../src/dataset/dataset.ts";
import { detect } from "../../../src/detect/detect.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import { simulated } from "../../support/scenarios.ts";
import { together } from "../../support/together.ts";

const time = { start: "2026-03-01T12:00:00", duration: "12min", integration: "20s" };
const REQUEST = { purpose: "continuum", lineChannels: [] } as const;
const found = async (dataset: Dataset) =>
  (await detect(await surveyDataset(dataset), REQUEST)).map(({ kind, scope }) => ({
    kind,
    antennas: scope.antennas,
  }));

describe("sub-arrays without an antenna in common", () => {
  const bright = simulated({ time, sky: [{ flux: "10Jy" }] }).dataset;
  const faint = simulated({
    time,
    seed: 5,
    sky: [{ flux: "1Jy" }],
    array: { layout: { kind: "ring", antennas: 8, radius: "700m" } },
    fields: [{ name: "Gull", ra: "8h36m", dec: "-12d" }],
    faults: [{ kind: "weak-antenna", antenna: 3, factor: 0.3 }],
  }).dataset;

  it("are each compared within themselves: a fainter field makes no antenna weak", async () => {
    const dataset = await together(
      [
        { dataset: bright, change: () => {} },
        {
          dataset: faint,
          change: ({ rows, antenna1, antenna2, subarray, field }) => {
            for (let row = 0; row < rows; row++) {
              antenna1[row]! += 9;
              antenna2[row]! += 9;
            }
            subarray.fill(2);
            field.fill(2);
          },
        },
      ],
      {
        fields: [bright.fields[0]!, { ...faint.fields[0]!, id: 2 }],
        array: {
          ...bright.array,
          antennas: [
            ...bright.array.antennas,
            ...faint.array.antennas.map((one) => ({
              ...one,
              number: one.number + 9,
              name: `B${one.number}`,
            })),
          ],
        },
      },
    );
    expect(await found(dataset)).toEqual([{ kind: "weak-antenna", antennas: [12] }]);
  });
});

describe("two frequency setups at the same times", () => {
  it("are both looked at: a fault in either is found, and what both show is one event", async () => {
    const make = (start: string, faults: NonNullable<Parameters<typeof simulated>[0]>["faults"]) =>
      simulated({ time, frequency: { start }, faults: [...(faults ?? [])] }).dataset;
    const silent = { kind: "silent-antenna", antenna: 4 } as const;
    const low = make("1.4GHz", [silent]);
    const high = make("1.6GHz", [silent, { kind: "weak-antenna", antenna: 7, factor: 0.3 }]);
    const dataset = await together(
      [
        { dataset: low, change: () => {} },
        { dataset: high, change: ({ setup }) => setup.fill(1) },
      ],
      { setups: [low.setups[0]!, { ...high.setups[0]!, id: 2 }] },
    );
    expect(await found(dataset)).toEqual([
      { kind: "silent-antenna", antennas: [4] },
      { kind: "weak-antenna", antennas: [7] },
    ]);
  });
});
