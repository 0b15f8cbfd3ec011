/** `visvet check`: survey, judge, print the text report, write the output files. */
import type { CommandModule } from "yargs";

interface CheckArguments {
  dataset: string[];
  plan: string | undefined;
  out: string | undefined;
  rules: string[] | undefined;
  field: number | undefined;
  strict: boolean;
  quiet: boolean;
}

export const check: CommandModule<object, CheckArguments> = {
  command: "check <dataset..>",
  describe: "Judge whether a dataset can give the planned image; write the reports",
  builder: (yargs) =>
    yargs
      .example("$0 check night12.uvfits", "judge it against an image derived from the data")
      .example("$0 check night12.uvfits --plan deep-field.yaml", "judge it against the image you plan")
      .example("$0 check a.uvfits b.uvfits --out checks --strict", "several; a caution also exits with 1")
      .positional("dataset", { type: "string", array: true, demandOption: true, describe: "FITS files" })
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
      .option("field", { type: "number", requiresArg: true, describe: "Judge this field alone, by its id" })
      .option("strict", { type: "boolean", default: false, describe: "Exit with 1 for a caution too" })
      .option("quiet", { type: "boolean", default: false, describe: "Print the verdict alone" }) as never,
  handler: async (given) => {
    const { runCheck } = await import("./run-check.ts");
    process.exitCode = await runCheck(given);
  },
};
