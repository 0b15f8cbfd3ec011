/** `visvet join`: the judgement of all parts of a survey together. */
import { command } from "./command.ts";
import { withJudgement } from "./judge-options.ts";
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
    withJudgement(yargs, "what the parts were made with")
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
      .option("out", {
        type: "string",
        requiresArg: true,
        describe: "Folder for the reports and flags [default: visvet-<dataset name>]",
      }),
  handler: async ({ "flags-as": flagsAs, ...given }) => {
    const { runJoin } = await import("./run-join.ts");
    process.exitCode = await runJoin({ ...given, flagsAs });
  },
});
