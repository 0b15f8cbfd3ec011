/** `visvet simulate`: write an invented dataset with known faults, and the truth beside it. */
import type { CommandModule } from "yargs";

interface SimulateArguments {
  scenario: string;
  out: string;
}

export const simulate: CommandModule<object, SimulateArguments> = {
  command: "simulate <scenario>",
  describe: "Write an invented dataset with known faults, and the truth beside it",
  builder: (yargs) =>
    yargs
      .example("$0 simulate three-faults.scenario.yaml --out night.uvfits", "also night.truth.json")
      .positional("scenario", { type: "string", demandOption: true, describe: "A scenario, a YAML file" })
      .option("out", {
        type: "string",
        demandOption: true,
        requiresArg: true,
        describe: "Random-groups FITS file to write; never one that is there already",
      }) as never,
  handler: async ({ scenario, out }) => {
    const { runSimulate } = await import("./run-simulate.ts");
    await runSimulate(scenario, out);
  },
};
