/** The visibilities themselves, block by block: a statistic of one's own. */
import { flaggedView, openDataset, type Selection, sampleIndex } from "visvet";

const dataset = await openDataset(process.argv[2] ?? "night12.uvfits");
const without3: Selection = {
  antennas: [3],
  baselines: null,
  time: null,
  subbands: null,
  channels: null,
  polarizations: null,
  fields: null,
};
const { shape } = dataset;
let sum = 0;
let count = 0;
for await (const block of flaggedView(dataset, [without3]).blocks({ want: "samples" })) {
  for (let row = 0; row < block.rows; row++) {
    for (let channel = 0; channel < shape.channels; channel++) {
      const at = sampleIndex(shape, row, 0, channel, 0);
      if (!(block.weight[at]! > 0)) continue;
      sum += Math.hypot(block.real[at]!, block.imag[at]!);
      count += 1;
    }
  }
}
console.log(
  `${count} samples of ${dataset.polarizations[0]}, mean amplitude ${(sum / count).toFixed(3)} ${dataset.unit}`,
);
