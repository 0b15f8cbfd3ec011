/** What the commands that judge a dataset have in common: what they judge by, and what they write and print. */
import type { Argv } from "yargs";
import { withResources } from "./resources.ts";

/** @param memory what it is where the user says nothing */
export function withJudgement(yargs: Argv, memory?: string): Argv {
  return withResources(yargs, memory)
    .option("plan", { type: "string", requiresArg: true, describe: "The image you plan, a YAML file" })
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
    .option("quiet", { type: "boolean", default: false, describe: "Print the verdict alone" });
}
