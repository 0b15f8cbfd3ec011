/** `visvet describe`: what is in a dataset; no judging. */
import { command } from "./command.ts";

export const describe = command<{ readonly dataset: string }>({
  command: "describe <dataset>",
  describe: "Show what is in a dataset; judge nothing",
  examples: [
    ["describe night12.uvfits", "array, times, fields, frequencies, sizes"],
    ["describe night12.uvfits.gz", "gzipped files are unpacked on the way"],
    ["describe 'night12/*.uvfits'", "the parts of one observation, as one dataset"],
  ],
  options: (yargs) =>
    yargs.positional("dataset", {
      type: "string",
      demandOption: true,
      describe: "A file, a folder or a quoted glob",
    }),
  handler: async ({ dataset: path }) => {
    const { openDataset } = await import("../dataset/open.ts");
    const { describeText } = await import("../report/describe.ts");
    const dataset = await openDataset(path);
    process.stdout.write(describeText(dataset, { summary: dataset.summary }));
  },
});
