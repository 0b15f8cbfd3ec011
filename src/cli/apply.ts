/** `visvet apply`: a copy of a dataset with accepted flags set. */
import { command } from "./command.ts";
import type { ApplyOptions } from "./run-apply.ts";

interface ApplyArguments extends Omit<ApplyOptions, "dryRun" | "columnMap"> {
  readonly "dry-run": boolean;
  readonly "column-map": string | undefined;
}

export const apply = command<ApplyArguments>({
  command: "apply <dataset> <flags>",
  describe: "Write a copy of a dataset with accepted flags set, everything else byte for byte",
  examples: [
    ["apply night12.uvfits visvet-night12/flags.json --dry-run", "what would change"],
    ["apply night12.uvfits visvet-night12/flags.json --out flagged.uvfits", "all of them"],
    ["apply night12.uvfits flags.json --out flagged.uvfits --only F1,F3", "two of them"],
    ["apply night12 flags.csv --out night12-flagged", "a folder of files, into another"],
  ],
  options: (yargs) =>
    yargs
      .positional("dataset", {
        type: "string",
        demandOption: true,
        describe: "A file, a folder or a quoted glob",
      })
      .positional("flags", {
        type: "string",
        demandOption: true,
        describe: "Flags that check wrote: flags.json, .csv, .parquet or .fits",
      })
      .option("out", {
        type: "string",
        requiresArg: true,
        describe:
          "File to write, or folder for several; never one that is there. Packed where it ends in .gz",
      })
      .option("dry-run", {
        type: "boolean",
        default: false,
        describe: "Say what would change; write nothing",
      })
      .option("only", {
        type: "string",
        array: true,
        requiresArg: true,
        describe: "These flags alone, by id: F1,F3",
      })
      .option("except", { type: "string", array: true, requiresArg: true, describe: "All flags but these" })
      .option("into", {
        choices: ["weights", "flag-table", "flag-column"] as const,
        requiresArg: true,
        describe: "Where the flags go [default: the usual place of the format that has room for them]",
      })
      .option("column-map", {
        type: "string",
        requiresArg: true,
        describe: "What the columns of a table are, a YAML file",
      }),
  handler: async ({ "dry-run": dryRun, "column-map": columnMap, ...given }) => {
    const { runApply } = await import("./run-apply.ts");
    await runApply({ ...given, dryRun, columnMap });
  },
});
