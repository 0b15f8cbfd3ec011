/** `visvet check`: survey, judge, print the text report, write the output files. */
import { command } from "./command.ts";
import { withResources } from "./resources.ts";
import type { CheckOptions } from "./run-check.ts";

interface CheckArguments extends Omit<CheckOptions, "flagsAs"> {
  readonly "flags-as": readonly string[] | undefined;
}

export const check = command<CheckArguments>({
  command: "check <dataset..>",
  describe: "Judge whether a dataset can give the planned image; write the reports",
  examples: [
    ["check night12.uvfits", "against an image derived from the data"],
    ["check night12.uvfits --plan deep.yaml", "against the image you plan"],
    ["check 'night12/*.uvfits' --field HERON", "the parts of one observation; one of its fields"],
    ["check a.uvfits b.uvfits --out checks --strict", "several; a caution also exits with 1"],
  ],
  options: (yargs) =>
    withResources(yargs)
      .positional("dataset", {
        type: "string",
        array: true,
        demandOption: true,
        describe: "Files, folders or quoted globs: each is a dataset",
      })
      .option("plan", { type: "string", requiresArg: true, describe: "The image you plan, a YAML file" })
      .option("out", {
        type: "string",
        requiresArg: true,
        describe: "Folder for the reports and flags [default: visvet-<dataset name>]",
      })
      .option("columns", {
        type: "string",
        requiresArg: true,
        describe: "What the columns of tables hold, a YAML file [default: the one beside them, or a guess]",
      })
      .option("rules", {
        type: "string",
        array: true,
        requiresArg: true,
        describe: "Folders of rule files that add to ours, or replace them by id",
      })
      .option("field", {
        type: "string",
        requiresArg: true,
        describe: "Judge this field alone, by its id or name",
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
    const { runCheck } = await import("./run-check.ts");
    process.exitCode = await runCheck({ ...given, flagsAs });
  },
});
