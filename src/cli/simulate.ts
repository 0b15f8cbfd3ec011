/** `visvet simulate`: write an invented dataset with known faults, and the truth beside it. */
import { command } from "./command.ts";

interface SimulateArguments {
  readonly scenario: string;
  readonly out: string;
}

export const simulate = command<SimulateArguments>({
  command: "simulate <scenario>",
  describe: "Write an invented dataset with known faults, and the truth beside it",
  examples: [["simulate three-faults.scenario.yaml --out night.uvfits", "also night.truth.json"]],
  options: (yargs) =>
    yargs
      .positional("scenario", { type: "string", demandOption: true, describe: "A scenario, a YAML file" })
      .option("out", {
        type: "string",
        demandOption: true,
        requiresArg: true,
        describe:
          "File to write, in the format of its suffix: .uvfits, .idifits, .parquet, .arrow, .csv; never one that is there already",
      }),
  handler: async ({ scenario, out }) => {
    const { runSimulate } = await import("./run-simulate.ts");
    await runSimulate(scenario, out);
  },
});
