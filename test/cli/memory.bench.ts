/**
 * How memory and time grow with the file: `check` and `part` of 0.25, 1 and 4 GB in one run, as peak resident size and
 * seconds over those of the smallest. 27 antennas, 64 channels, two products; the rows of a short observation again and
 * again, with their times moved on. VISVET_BENCH_GB, such as 0.25,1, chooses other sizes.
 */
import { spawnSync } from "node:child_process";
import { mkdtemp, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { bench, describe } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { writeUvfits } from "../../src/simulate/write-uvfits.ts";
import { simulated } from "../support/scenarios.ts";

const MAIN = fileURLToPath(new URL("../../dist/cli/main.js", import.meta.url));
const SIZES = (process.env.VISVET_BENCH_GB ?? "0.25,1,4").split(",").map(Number);
/** The last line on stderr: the peak of the whole process, threads among it, kB. */
const TELL = "data:text/javascript,process.on('exit',()=>console.error(process.resourceUsage().maxRSS))";
const SECONDS = 10;

const { dataset: short } = simulated({
  name: "short",
  array: { layout: { kind: "spiral", antennas: 27, inner: "60m", radius: "2km" } },
  time: { duration: "320s", integration: `${SECONDS}s` },
  frequency: { channels: 64 },
});
const { subbands, channels, polarizations } = short.shape;
const ROW_BYTES = 28 + 12 * subbands * channels * polarizations;

/** The dataset `times` over, each repetition after the one before. */
function repeated(times: number): Dataset {
  return {
    ...short,
    rows: short.rows * times,
    async *blocks(request) {
      for (let k = 0; k < times; k++) {
        for await (const block of short.blocks(request)) {
          block.firstRow += k * short.rows;
          for (let row = 0; row < block.rows; row++) block.time[row]! += (k * 32 * SECONDS) / 86_400;
          yield block;
        }
      }
    },
  };
}

interface Cost {
  readonly seconds: number;
  readonly megabytes: number;
}

function run(folder: string, words: readonly string[]): Cost {
  const start = performance.now();
  const { status, stderr } = spawnSync(process.execPath, ["--import", TELL, MAIN, ...words, "--quiet"], {
    cwd: folder,
    encoding: "utf8",
  });
  if (status !== 0 && status !== 1) throw new Error(stderr);
  const peak = Number(stderr.trimEnd().split("\n").at(-1));
  return { seconds: (performance.now() - start) / 1000, megabytes: peak / 1000 };
}

const ONCE = { iterations: 1, time: 0, warmupIterations: 0, warmupTime: 0 };

describe("memory and time as the file grows", () => {
  bench(
    `of ${SIZES.join(", ")} GB`,
    async () => {
      const folder = await mkdtemp(join(tmpdir(), "visvet-growth-"));
      try {
        const first = new Map<string, Cost>();
        for (const size of SIZES) {
          const times = Math.max(1, Math.round((size * 1e9) / (short.rows * ROW_BYTES)));
          await writeUvfits(repeated(times), join(folder, "night.uvfits"), { overwrite: true });
          for (const [name, words] of [
            ["check", ["check", "night.uvfits", "--out", "out"]],
            ["part", ["part", "night.uvfits", "--index", "0", "--of", "1", "--out", "0.part"]],
          ] as const) {
            const cost = run(folder, words);
            const least = first.get(name) ?? cost;
            first.set(name, least);
            const ratio = (a: number, b: number) => (a / b).toFixed(2);
            process.stdout.write(
              `${name} of ${size} GB: ${cost.megabytes.toFixed(0)} MB at most, ${ratio(cost.megabytes, least.megabytes)} times that of ` +
                `${SIZES[0]} GB; ${cost.seconds.toFixed(1)} s, ${ratio(cost.seconds, least.seconds)} times\n`,
            );
          }
        }
      } finally {
        await rm(folder, { recursive: true, force: true });
      }
    },
    ONCE,
  );
});
