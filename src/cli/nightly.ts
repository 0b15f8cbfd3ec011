/** `visvet nightly`: check what is new or has changed, keep history, write an index page with trends. */
import { command } from "./command.ts";
import { withResources } from "./resources.ts";
import type { NightlyOptions } from "./run-nightly.ts";

interface NightlyArguments extends Omit<NightlyOptions, "onTrouble"> {
  readonly "on-trouble": string | undefined;
}

export const nightly = command<NightlyArguments>({
  command: "nightly <dir>",
  describe: "Check what is new or has changed in a folder; keep a history, write an index page with trends",
  examples: [
    [
      "nightly /data --history nights.sqlite --out nights",
      "what is new, each against a plan derived from it",
    ],
    [
      "nightly /data --history nights.sqlite --out nights --plans plans.yaml",
      "each against the plan that is for it",
    ],
    ["nightly /data --history nights.sqlite --out nights --on-trouble 'mail -s visvet you'", "tell somebody"],
    ["nightly /data --history nights.sqlite --out nights --keep 365d", "shows what --prune would delete"],
  ],
  options: (yargs) =>
    withResources(yargs)
      .positional("dir", {
        type: "string",
        demandOption: true,
        describe: "The folder in which datasets appear",
      })
      .option("history", {
        type: "string",
        demandOption: true,
        requiresArg: true,
        describe: "The history, an SQLite file; made where there is none",
      })
      .option("out", {
        type: "string",
        demandOption: true,
        requiresArg: true,
        describe: "Folder for the reports and the index page",
      })
      .option("plans", {
        type: "string",
        requiresArg: true,
        describe: "Which plan is for which datasets, a YAML file [default: plans.yaml in the folder, if any]",
      })
      .option("rules", {
        type: "string",
        array: true,
        requiresArg: true,
        describe: "Folders of rule files that add to ours, or replace them by id",
      })
      .option("rest", {
        type: "string",
        default: "60s",
        requiresArg: true,
        describe: "A file that has not changed for so long is whole",
      })
      .option("wait", {
        type: "string",
        default: "10min",
        requiresArg: true,
        describe: "Wait so long for files still being written",
      })
      .option("keep", {
        type: "string",
        requiresArg: true,
        describe: "Checks that are to be kept, such as 365d or 2000checks; names what is beyond",
      })
      .option("prune", { type: "boolean", default: false, describe: "Delete what is beyond --keep" })
      .option("on-trouble", {
        type: "string",
        requiresArg: true,
        describe: "Command to run on a caution, a hold or an unreadable dataset; the summary is its input",
      })
      .option("strict", { type: "boolean", default: false, describe: "Exit with 1 for a caution too" })
      .option("json", { type: "boolean", default: false, describe: "Print JSON, for monitoring" })
      .option("quiet", { type: "boolean", default: false, describe: "Print the summary line alone" }),
  handler: async ({ "on-trouble": onTrouble, ...given }) => {
    const { runNightlyCommand } = await import("./run-nightly.ts");
    process.exitCode = await runNightlyCommand({ ...given, onTrouble });
  },
});
