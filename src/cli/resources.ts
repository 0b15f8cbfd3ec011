/** `--jobs` and `--memory`, as every command that reads samples takes them; what they mean stands in take-resources.ts. */
import type { Argv } from "yargs";

export interface ResourceOptions {
  readonly jobs: number | undefined;
  readonly memory: string | undefined;
}

/** Threads that are taken without being asked for. */
export const MOST_JOBS_UNASKED = 8;
export const DEFAULT_MEMORY = "1 GB";

/** @param memory what it is where the user says nothing */
export function withResources(yargs: Argv, memory: string = DEFAULT_MEMORY): Argv {
  return yargs
    .option("jobs", {
      type: "number",
      requiresArg: true,
      describe: `Threads that read and compute [default: one a processor, at most ${MOST_JOBS_UNASKED}]`,
    })
    .option("memory", {
      type: "string",
      requiresArg: true,
      describe: `Memory to stay within, such as 4GB [default: ${memory}]`,
    });
}
