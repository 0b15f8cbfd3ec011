/** The integrations of a dataset and the order of its rows. */
import type { Accumulator } from "./accumulator.ts";
import { AUTOCORRELATION, type PreparedBlock } from "./prepared.ts";

/** A float32 day fraction near 0.6 resolves 5.15 ms: times closer than this are one integration. */
export const TIME_STEP_DAYS = 5.2e-3 / 86_400;

/** Rows that followed each other. */
interface Run {
  first: number;
  last: number;
  firstTime: number;
  lastTime: number;
  backward: number;
}

export class TimeOrder implements Accumulator {
  private runs: Run[] = [];
  /** earliest time of each step of the clock */
  private readonly times = new Map<number, number>();
  rows = 0;
  badTimeRows = 0;
  badUvwRows = 0;

  add(prepared: PreparedBlock): void {
    const { block } = prepared;
    let run = this.runs.at(-1);
    if (prepared.rows > 0 && (run === undefined || run.last + 1 !== block.firstRow)) {
      run = {
        first: block.firstRow,
        last: block.firstRow - 1,
        firstTime: Number.NaN,
        lastTime: Number.NaN,
        backward: 0,
      };
      this.runs.push(run);
    }
    // Rows of one integration follow each other: only an earlier time of the same step is news.
    let lastStep = Number.NaN;
    let earliest = Number.NaN;
    for (let row = 0; row < prepared.rows; row++) {
      const time = block.time[row]!;
      if (time < run!.lastTime - TIME_STEP_DAYS) run!.backward += 1;
      if (!Number.isNaN(time)) run!.lastTime = time;
      if (Number.isNaN(run!.firstTime)) run!.firstTime = time;
      run!.last += 1;
      if (prepared.baseline[row] === AUTOCORRELATION) continue;
      this.rows += 1;
      if (Number.isNaN(time)) this.badTimeRows += 1;
      if (!Number.isFinite(block.u[row]! + block.v[row]! + block.w[row]!)) this.badUvwRows += 1;
      const step = Math.round(time / TIME_STEP_DAYS);
      if (Number.isNaN(time) || (step === lastStep && time >= earliest)) continue;
      lastStep = step;
      earliest = time;
      this.note(step, time);
    }
  }

  private note(step: number, time: number): void {
    const known = this.times.get(step);
    if (known === undefined || time < known) this.times.set(step, time);
  }

  merge(other: this): void {
    this.runs.push(...other.runs.map((run) => ({ ...run })));
    for (const [step, time] of other.times) this.note(step, time);
    this.rows += other.rows;
    this.badTimeRows += other.badTimeRows;
    this.badUvwRows += other.badUvwRows;
  }

  /** Rows earlier than the row before them. */
  get backwardRows(): number {
    const runs = [...this.runs].sort((a, b) => a.first - b.first);
    let backward = 0;
    let lastTime = Number.NaN;
    for (const run of runs) {
      backward += run.backward + (run.firstTime < lastTime - TIME_STEP_DAYS ? 1 : 0);
      if (!Number.isNaN(run.lastTime)) lastTime = run.lastTime;
    }
    return backward;
  }

  /** Integration centres, MJD ascending; of times within a step of each other the earliest. */
  get integrations(): Float64Array {
    const all = Float64Array.from(this.times.values()).sort();
    const kept: number[] = [];
    for (const time of all) {
      if (kept.length === 0 || time - kept.at(-1)! > TIME_STEP_DAYS) kept.push(time);
    }
    return Float64Array.from(kept);
  }
}
