/** `visvet join`: the judgement of all parts of a survey together. */
import { command } from "./command.ts";
import { withResources } from "./resources.ts";
import type { JoinOptions } from "./run-join.ts";

interface JoinArguments extends Omit<JoinOptions, "flagsAs"> {
  readonly "flags-as": readonly string[] | undefined;
}

export const join = command<JoinArguments>({
  command: "join <parts..>",
  describe: "Judge a dataset from the parts of its survey; write the same reports as one check",
  examples: [
    ["join night12/*.part --out night12", "all parts that visvet part wrote"],
    ["join *.part --out night12 --plan deep.yaml", "against the image you plan"],
    ["join *.part --out night12 --dataset /data/night12.uvfits", "where the dataset has moved"],
  ],
  options: (yargs) =>
    withResources(yargs, "what the parts were made with")
      .positional("parts", {
        type: "string",
        array: true,
        demandOption: true,
        describe: "The files of all parts, in any order",
      })
      .option("dataset", {
        type: "string",
        array: true,
        requiresArg: true,
        describe: "Where the dataset is now, if not where the parts found it",
      })
      .option("plan", { type: "string", requiresArg: true, describe: "The image you plan, a YAML file" })
      .option("out", {
        type: "string",
        requiresArg: true,
        describe: "Folder for the reports and flags [default: visvet-<dataset name>]",
      })
      .option("rules", {
        type: "string",
        array: true,
        requiresArg: true,
        describe: "Folders of rule files that add to ours, or replace them by id",
      })
      .option("flags-as", {
        type: "string",
        array: true,
        requiresArg: true,
        describe: "The flags in other formats too: csv, parquet, idi (a FITS-IDI FLAG table)",
      })
      .option("tables", {
        choices: ["parquet", "arrow", "csv"] as const,
        requiresArg: true,
        describe: "Every measure as a table, in the folder tables of the output",
      })
      .option("strict", { type: "boolean", default: false, describe: "Exit with 1 for a caution too" })
      .option("quiet", { type: "boolean", default: false, describe: "Print the verdict alone" }),
  handler: async ({ "flags-as": flagsAs, ...given }) => {
    const { runJoin } = await import("./run-join.ts");
    process.exitCode = await runJoin({ ...given, flagsAs });
  },
});
