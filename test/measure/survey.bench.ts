/**
 * The surveying pass over blocks that are in memory already, against summing the power of the same samples: what the
 * measures cost beside the least that anyone could do with each sample. 27 antennas, 64 channels, four products.
 */
import { bench, describe } from "vitest";
import type { Dataset, SampleBlock } from "../../src/dataset/dataset.ts";
import { surveyDataset } from "../../src/measure/survey.ts";
import { simulated } from "../support/scenarios.ts";

const { dataset } = simulated({
  polarizations: ["RR", "LL", "RL", "LR"],
  array: { layout: { kind: "spiral", antennas: 27, inner: "40m", radius: "1km", relief: "2m" } },
  time: { duration: "2min" },
  frequency: { channels: 64 },
});
const { subbands, channels, polarizations } = dataset.shape;
const rowSamples = subbands * channels * polarizations;

/** The same blocks from memory each time, so that only the survey is timed. */
async function inMemory(source: Dataset): Promise<Dataset> {
  const blocks: SampleBlock[] = [];
  for await (const block of source.blocks({ want: "samples", blockRows: 128 }))
    blocks.push(structuredClone(block));
  return {
    ...source,
    blocks: async function* (request) {
      const [first, last] = request.rows ?? [0, source.rows];
      for (const block of blocks)
        if (block.firstRow < last && block.firstRow + block.rows > first) yield block;
    },
  };
}
const held = await inMemory(dataset);

let total = 0;
describe(`${dataset.rows * rowSamples} samples`, () => {
  bench("power alone", async () => {
    for await (const block of held.blocks({ want: "samples" })) {
      const { real, imag, weight } = block;
      for (let i = 0; i < block.rows * rowSamples; i++) {
        if (weight[i]! > 0) total += real[i]! * real[i]! + imag[i]! * imag[i]!;
      }
    }
    if (!(total > 0)) throw new Error("nothing was summed");
  });
  bench("survey", async () => {
    const survey = await surveyDataset(held);
    if (survey.totals.usable !== dataset.rows * rowSamples) throw new Error("samples were lost");
  });
});
