/** Whole processes timed in turn: what they took, and how much memory. */
import { spawnSync } from "node:child_process";
import { readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";

const PEAK = new URL("peak-memory.mjs", import.meta.url).href;
export const MAIN = fileURLToPath(new URL("../../dist/cli/main.js", import.meta.url));

export interface Run {
  readonly seconds: number;
  /** bytes; NaN where it was not asked for */
  readonly peak: number;
}

export function timed(command: string, words: readonly string[], statuses: readonly number[] = [0]): Run {
  const file = join(tmpdir(), `visvet-bench-peak-${process.pid}`);
  rmSync(file, { force: true });
  const start = process.hrtime.bigint();
  const run = spawnSync(command, words, {
    encoding: "utf8",
    env: { ...process.env, VISVET_BENCH_PEAK: file },
    maxBuffer: 1 << 26,
  });
  const seconds = Number(process.hrtime.bigint() - start) / 1e9;
  if (run.status === null || !statuses.includes(run.status)) {
    throw new Error(`${command} ${words.join(" ")} ended with ${run.status}: ${run.stderr}`);
  }
  let peak = Number.NaN;
  try {
    peak = Number(readFileSync(file, "utf8"));
    rmSync(file);
  } catch {
    // A process that is not Node leaves none.
  }
  return { seconds, peak };
}

/** The program as users run it; a hold is an answer too. */
export function visvet(...words: readonly string[]): Run {
  return timed(process.execPath, ["--import", PEAK, MAIN, ...words], [0, 1]);
}

export function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  const half = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[half]! : (sorted[half - 1]! + sorted[half]!) / 2;
}

/** Both in turn, in the other order each round; medians of seconds and of the ratio pair by pair. */
export function pairs(
  rounds: number,
  one: () => Run,
  other: () => Run,
): {
  readonly ratio: number;
  readonly low: number;
  readonly high: number;
  readonly one: Run[];
  readonly other: Run[];
} {
  const ones: Run[] = [];
  const others: Run[] = [];
  for (let round = 0; round < rounds; round++) {
    if (round % 2 === 0) {
      ones.push(one());
      others.push(other());
    } else {
      others.push(other());
      ones.push(one());
    }
  }
  const ratios = ones.map(({ seconds }, i) => seconds / others[i]!.seconds);
  return {
    ratio: median(ratios),
    low: Math.min(...ratios),
    high: Math.max(...ratios),
    one: ones,
    other: others,
  };
}
