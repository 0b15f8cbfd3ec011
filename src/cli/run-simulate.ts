/** The work behind `visvet simulate`, apart from its options so that `--help` need not load it. */
import { createProgress } from "../report/progress.ts";
import { simulateFile } from "../simulate/simulate-file.ts";
import { plainText } from "../util/terminal.ts";
import { formatBytes } from "../util/units.ts";

export async function runSimulate(scenario: string, out: string): Promise<void> {
  const progress = createProgress(process.stderr);
  const onRows = (done: number, of: number): void => progress.stage("writing", done / of);
  const file = await simulateFile(scenario, out, { onRows }).finally(progress.end);
  const { rows, samples, bytes, faults, path, truthPath } = file;
  process.stdout.write(
    `Wrote ${plainText(path)}: ${rows} rows, ${samples} samples, ${formatBytes(bytes)}\n` +
      `Wrote ${plainText(truthPath)}: ${faults} ${faults === 1 ? "fault" : "faults"}\n`,
  );
}
