/** `visvet describe`: what is in a dataset; no judging. */
import { command } from "./command.ts";

interface DescribeArguments {
  readonly dataset: string;
  readonly columns: string | undefined;
  readonly "column-map": string | undefined;
}

export const describe = command<DescribeArguments>({
  command: "describe <dataset>",
  describe: "Show what is in a dataset; judge nothing",
  examples: [
    ["describe night12.uvfits", "array, times, fields, frequencies, sizes"],
    ["describe night12.uvfits.gz", "gzipped files are unpacked on the way"],
    ["describe 'night12/*.uvfits'", "the parts of one observation, as one dataset"],
    ["describe night12.csv --column-map night12.columns.yaml", "save what its columns were taken for"],
  ],
  options: (yargs) =>
    yargs
      .positional("dataset", {
        type: "string",
        demandOption: true,
        describe: "A file, a folder or a quoted glob",
      })
      .option("columns", {
        type: "string",
        requiresArg: true,
        describe: "What the columns of tables hold, a YAML file [default: the one beside them, or a guess]",
      })
      .option("column-map", {
        type: "string",
        requiresArg: true,
        describe: "Write the column map in force to this file; never one that is there already",
      }),
  handler: async ({ dataset: path, columns, "column-map": mapPath }) => {
    const { openDataset } = await import("../dataset/open.ts");
    const { describeText } = await import("../report/describe.ts");
    const dataset = await openDataset(path, { columnMap: columns });
    if (mapPath !== undefined) {
      const { saveColumnMap } = await import("../dataset/columnar/save-map.ts");
      await saveColumnMap(dataset, mapPath);
    }
    process.stdout.write(describeText(dataset, { summary: dataset.summary }));
  },
});
