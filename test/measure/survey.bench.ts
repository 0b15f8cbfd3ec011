/**
 * The surveying pass over blocks that are in memory already, against summing the power of the same samples: what the
 * measures cost beside the least that anyone could do with each sample. 12 antennas, 300 integrations, 64 channels, four
 * products: as many integrations as make levels worth having, since finishing costs the same however many there are.
 */
import { bench, describe } from "vitest";
import type { Dataset, SampleBlock } from "../../src/dataset/dataset.ts";
import { finishSurvey } from "../../src/measure/finish-survey.ts";
import { surveyPart } from "../../src/measure/survey.ts";
import { gridRows, memoryDataset } from "../support/memory-dataset.ts";

let state = 20260611;
/** Uniform in -1..1, the same every time. */
const random = () => {
  state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
  return state / 2 ** 31 - 1;
};
const dataset = memoryDataset({
  rows: gridRows(12, 300),
  channels: 64,
  polarizations: ["RR", "LL", "RL", "LR"],
  sample: () => [1 + random(), random(), 1],
});
const { subbands, channels, polarizations } = dataset.shape;
const rowSamples = subbands * channels * polarizations;
const samples = dataset.rows * rowSamples;

const blocks: SampleBlock[] = [];
for await (const block of dataset.blocks({ want: "samples", blockRows: 128 })) blocks.push(block);
/** The same blocks each time, so that only the survey is timed. */
const held: Dataset = {
  ...dataset,
  blocks: async function* () {
    yield* blocks;
  },
};

let total = 0;
describe(`${(samples / 1e6).toFixed(2)} million samples`, () => {
  bench("power alone", () => {
    for (const { real, imag, weight, rows } of blocks) {
      for (let i = 0; i < rows * rowSamples; i++) {
        if (weight[i]! > 0) total += real[i]! * real[i]! + imag[i]! * imag[i]!;
      }
    }
    if (!(total > 0)) throw new Error("nothing was summed");
  });
  bench("the pass", async () => {
    const part = await surveyPart(held);
    if (part.gathered.order.rows !== dataset.rows) throw new Error("rows were lost");
  });
  bench("the pass, levels and tables", async () => {
    const survey = finishSurvey(await surveyPart(held));
    if (survey.totals.usable !== samples) throw new Error("samples were lost");
  });
});
