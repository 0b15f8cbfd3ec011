/** What every command of visvet has: a usage that shows examples first, and a handler that knows its arguments. */
import type { Argv, CommandModule } from "yargs";

export interface Command<Arguments> {
  /** name and positionals, as yargs takes them */
  readonly command: string;
  readonly describe: string;
  /** command line without the program's name, and what it gives */
  readonly examples: readonly (readonly [string, string])[];
  readonly options: (yargs: Argv) => Argv;
  readonly handler: (given: Arguments) => Promise<void>;
}

export function command<Arguments>(of: Command<Arguments>): CommandModule<object, Arguments> {
  return {
    command: of.command,
    describe: of.describe,
    // yargs can not follow positionals through a builder: what the handler gets is stated by `Arguments`.
    builder: (yargs) => of.options(yargs.usage(usageOf(of))) as Argv<Arguments>,
    handler: (given) => of.handler(given as Arguments),
  };
}

/** yargs puts its own examples last; people look at the first lines. */
function usageOf<Arguments>({ command, describe, examples }: Command<Arguments>): string {
  const width = Math.max(...examples.map(([line]) => line.length));
  const lines = examples.map(([line, gives]) => `  $0 ${line.padEnd(width)}  ${gives}`);
  return ["Examples:", ...lines, "", `$0 ${command}`, "", describe].join("\n");
}
