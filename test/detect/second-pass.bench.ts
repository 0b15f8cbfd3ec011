/**
 * The second pass over blocks that are in memory already, against summing the power of the same samples: 16 antennas, 96
 * integrations, 2 sub-bands of 64 channels, two products; noise and a source, and the same with interference.
 */
import { bench, describe } from "vitest";
import type { Dataset, SampleBlock } from "../../src/dataset/dataset.ts";
import { wholeChoice } from "../../src/detect/pass/choice.ts";
import { secondPass } from "../../src/detect/pass/second-pass.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { type Changes, simulated } from "../support/scenarios.ts";

const SHAPE: Changes = {
  array: { layout: { kind: "spiral", antennas: 16, inner: "40m", radius: "1km", relief: "2m" } },
  time: { duration: "16min" },
  frequency: { channels: 64, subbands: 2 },
};

async function held({ dataset }: { dataset: Dataset }): Promise<{ dataset: Dataset; blocks: SampleBlock[] }> {
  const blocks: SampleBlock[] = [];
  for await (const block of dataset.blocks({ want: "samples" })) blocks.push(structuredClone(block));
  const { subbands, channels, polarizations } = dataset.shape;
  const each = subbands * channels * polarizations;
  const read: Dataset["blocks"] = (request) => {
    if (request.want !== "samples") return dataset.blocks(request);
    const [first, end] = request.rows ?? [0, dataset.rows];
    return (async function* () {
      for (const block of blocks) {
        const from = Math.max(0, first - block.firstRow);
        const to = Math.min(block.rows, end - block.firstRow);
        if (from < to) yield rowsOf(block, from, to, each);
      }
    })();
  };
  return { dataset: { ...dataset, blocks: read }, blocks };
}

/** Rows [from, to) of a block, without a copy. */
function rowsOf(block: SampleBlock, from: number, to: number, each: number): SampleBlock {
  const entries = Object.entries(block).map(([name, column]) => {
    if (typeof column === "number") return [name, column];
    const size = ["real", "imag", "weight"].includes(name) ? each : 1;
    return [name, column.subarray(from * size, to * size)];
  });
  return { ...Object.fromEntries(entries), firstRow: block.firstRow + from, rows: to - from };
}

const clean = await held(simulated(SHAPE));
const spoilt = await held(
  simulated({
    ...SHAPE,
    faults: [
      { kind: "persistent-line", channels: "20-24", amplitude: "6 sigma" },
      { kind: "burst", channels: "40-50", time: ["5min", "7min"], amplitude: "8 sigma" },
    ],
  }),
);
const { subbands, channels, polarizations } = clean.dataset.shape;
const rowSamples = subbands * channels * polarizations;
const samples = clean.dataset.rows * rowSamples;
const surveys = [await surveyDataset(clean.dataset), await surveyDataset(spoilt.dataset)];

let total = 0;
describe(`${(samples / 1e6).toFixed(2)} million samples`, () => {
  bench("power alone", () => {
    for (const { real, imag, weight, rows } of clean.blocks) {
      for (let i = 0; i < rows * rowSamples; i++) {
        if (weight[i]! > 0) total += real[i]! * real[i]! + imag[i]! * imag[i]!;
      }
    }
    if (!(total > 0)) throw new Error("nothing was summed");
  });
  for (const [i, what] of ["good data", "interference"].entries()) {
    bench(`second pass where the screen shows something, ${what}`, async () => {
      await secondPass(surveys[i]!);
    });
    bench(`second pass everywhere, ${what}`, async () => {
      const { marks } = await secondPass(surveys[i]!, { choice: wholeChoice(surveys[i]!) });
      if (marks!.usable.total() !== samples) throw new Error("samples were lost");
    });
  }
});
