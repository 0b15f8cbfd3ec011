/** `visvet check`: survey, judge, print the text report, write the output files. */
import { command } from "./command.ts";
import { withJudgement } from "./judge-options.ts";
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
    withJudgement(yargs)
      .positional("dataset", {
        type: "string",
        array: true,
        demandOption: true,
        describe: "Files, folders or quoted globs: each is a dataset",
      })
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
      .option("field", {
        type: "string",
        requiresArg: true,
        describe: "Judge this field alone, by its id or name",
      }),
  handler: async ({ "flags-as": flagsAs, ...given }) => {
    const { runCheck } = await import("./run-check.ts");
    process.exitCode = await runCheck({ ...given, flagsAs });
  },
});
