/** Loaded into a process that is measured: leaves its largest resident size, bytes, in the file that is named. */
import { writeFileSync } from "node:fs";

process.on("exit", () => {
  const file = process.env.VISVET_BENCH_PEAK;
  if (file !== undefined) writeFileSync(file, String(process.resourceUsage().maxRSS * 1024));
});
