#!/usr/bin/env node
/** The `visvet` command: finds the subcommand, and turns what is thrown into one line and an exit status. */
import yargs from "yargs";
import { hideBin } from "yargs/helpers";
import { InputError, nearest } from "../util/errors.ts";
import { plainText } from "../util/terminal.ts";
import { apply } from "./apply.ts";
import { check } from "./check.ts";
import { describe } from "./describe.ts";
import { explain } from "./explain.ts";
import { join } from "./join.ts";
import { nightly } from "./nightly.ts";
import { part } from "./part.ts";
import { simulate } from "./simulate.ts";
import { triage } from "./triage.ts";

/** Could not be judged: bad usage, unreadable or malformed input. */
const EXIT_NOT_JUDGED = 2;

const COMMANDS = [check, apply, describe, explain, part, join, nightly, simulate, triage].map(
  ({ command }) => String(command).split(" ")[0]!,
);

// A reader that has seen enough (`visvet check … | head`) is no error.
process.stdout.on("error", (error: NodeJS.ErrnoException) => {
  if (error.code === "EPIPE") process.exit(process.exitCode ?? 0);
  throw error;
});

try {
  await yargs(hideBin(process.argv))
    .scriptName("visvet")
    .usage("$0 <command>\n\nVet a visibility dataset before anyone images it.")
    .command(check)
    .command(apply)
    .command(describe)
    .command(explain)
    .command(part)
    .command(join)
    .command(nightly)
    .command(simulate)
    .command(triage)
    .demandCommand(1, "Name a command")
    .strictCommands()
    .strict()
    .wrap(Math.min(100, process.stdout.columns ?? 100))
    .epilogue("visvet <command> --help shows examples first.")
    .fail((message, error) => {
      throw error ?? new InputError(message, {}, adviceFor(message));
    })
    .parseAsync();
} catch (error) {
  process.exitCode = EXIT_NOT_JUDGED;
  process.stderr.write(`${plainText(lineOf(error))}\n`);
}

function adviceFor(message: string): string {
  const unknown = /^Unknown command: (\S+)$/.exec(message)?.[1];
  const meant = unknown === undefined ? undefined : nearest(unknown, COMMANDS);
  return meant === undefined ? "See visvet --help" : `Did you mean ${meant}? See visvet --help`;
}

function lineOf(error: unknown): string {
  if (error instanceof InputError) return error.line;
  // Anything else is a defect of ours: say so, with the trace a report of it needs.
  const trace = error instanceof Error ? (error.stack ?? error.message) : String(error);
  return `visvet failed in a way it should not: ${trace.replaceAll("\n", " | ")}`;
}
