/** `visvet part`: the survey of a share of the rows, for batch schedulers. */
import { command } from "./command.ts";
import { withResources } from "./resources.ts";
import type { PartOptions } from "./run-part.ts";

export const part = command<PartOptions>({
  command: "part <dataset..>",
  describe: "Survey a share of a dataset into a file; visvet join judges all of them together",
  examples: [
    ["part night12.uvfits --index 0 --of 4 --out 0.part", "the first quarter of the rows"],
    ["part night12.uvfits --index 3 --of 4 --out 3.part", "the last: parts are numbered from 0"],
    ["join *.part --out night12", "when all are there: the same reports as one check"],
  ],
  options: (yargs) =>
    withResources(yargs)
      .positional("dataset", {
        type: "string",
        array: true,
        demandOption: true,
        describe: "Files, a folder or a quoted glob: one dataset",
      })
      .option("index", {
        type: "number",
        requiresArg: true,
        demandOption: true,
        describe: "Which part, from 0",
      })
      .option("of", { type: "number", requiresArg: true, demandOption: true, describe: "How many parts" })
      .option("out", {
        type: "string",
        requiresArg: true,
        demandOption: true,
        describe: "File of the part; one that is there already and whole is left as it is",
      })
      .option("field", {
        type: "string",
        requiresArg: true,
        describe: "Survey this field alone, by its id or name",
      })
      .option("quiet", { type: "boolean", default: false, describe: "Say nothing but errors" }),
  handler: async (given) => {
    const { runPart } = await import("./run-part.ts");
    await runPart(given);
  },
});
