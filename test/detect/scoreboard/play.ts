/**
 * Plays the whole scoreboard on the seeds that nothing was tuned on and prints the table:
 * `npx vitest run --config test/detect/scoreboard/vitest.config.ts`. Takes some minutes.
 */
import { it } from "vitest";
import { CASES, REPORT_SEEDS } from "./cases.ts";
import { playAll, rowOf, tableOf } from "./table.ts";

it("plays", async () => {
  const lines = await playAll(CASES, REPORT_SEEDS, (line) => process.stderr.write(`${rowOf(line)}\n`));
  process.stdout.write(`\n${tableOf(lines)}\n`);
}, 3_600_000);
