/** The order of the rows in time, and the times at which each field was observed. */
import { SECONDS_PER_DAY } from "../util/constants.ts";
import type { Accumulator } from "./accumulator.ts";
import { AUTOCORRELATION, OTHER, type PreparedBlock } from "./prepared.ts";
import type { StateReader } from "./state/reader.ts";
import type { StateRecord } from "./state/value.ts";
import type { Baseline } from "./survey-result.ts";
import { TimeList } from "./time-list.ts";

/** A float32 day fraction near 0.6 resolves 5.15 ms: times closer than this are one integration. */
export const TIME_STEP_DAYS = 5.2e-3 / SECONDS_PER_DAY;

/** Rows that follow each other in the dataset; of its cross-correlations with a time, the first and the last. */
interface Run {
  readonly firstRow: number;
  endRow: number;
  firstTime: number;
  firstBaseline: number;
  lastTime: number;
  lastBaseline: number;
  /** rows earlier than the row before them, of another baseline and of the same one */
  backward: number;
  backwardSame: number;
  /** rows of the same baseline as the row before them */
  same: number;
}

/** Times of one field and sub-array. */
export interface Visits {
  readonly field: number;
  readonly subarray: number;
  readonly times: TimeList;
}

export class TimeOrder implements Accumulator {
  private runs: Run[] = [];
  private readonly visits = new Map<string, Visits>();
  private readonly integrations = new IntegrationCounts();
  rows = 0;
  badTimeRows = 0;
  badUvwRows = 0;
  wKnown = false;

  add(prepared: PreparedBlock): void {
    const { block, baseline, rows } = prepared;
    const run = newRun(block.firstRow, rows);
    let visits: Visits | undefined;
    let lastVisit = Number.NaN;
    for (let row = 0; row < rows; row++) {
      if (baseline[row] === AUTOCORRELATION) continue;
      this.rows += 1;
      this.noteUvw(block.u[row]!, block.v[row]!, block.w[row]!);
      const time = block.time[row]!;
      if (!Number.isFinite(time)) {
        this.badTimeRows += 1;
        continue;
      }
      const number = baseline[row]!;
      const isOther = number === OTHER;
      step(run, time, isOther ? codeOf(block.antenna1[row]!, block.antenna2[row]!) : number);
      this.integrations.add(block.integration[row]!, 1);
      if (
        visits === undefined ||
        visits.field !== block.field[row] ||
        visits.subarray !== block.subarray[row]
      ) {
        visits = this.visitsOf(block.field[row]!, block.subarray[row]!);
      } else if (time === lastVisit) continue;
      visits.times.add(time);
      lastVisit = time;
    }
    this.runs.push(run);
    this.joinRuns();
  }

  private noteUvw(u: number, v: number, w: number): void {
    if (!Number.isFinite(u + v + w)) this.badUvwRows += 1;
    if (w !== 0 && Number.isFinite(w)) this.wKnown = true;
  }

  private visitsOf(field: number, subarray: number): Visits {
    const key = `${field} ${subarray}`;
    let visits = this.visits.get(key);
    if (visits === undefined) {
      visits = { field, subarray, times: new TimeList() };
      this.visits.set(key, visits);
    }
    return visits;
  }

  thin(baselines: Int32Array, before: readonly Baseline[]): void {
    this.runs = this.runs.map((run) =>
      withBaselines(run, (baseline) => {
        const now = baselines[baseline]!;
        return now === OTHER ? codeOf(before[baseline]!.antenna1, before[baseline]!.antenna2) : now;
      }),
    );
  }

  merge(other: this, baselines: Int32Array): void {
    for (const run of other.runs) {
      this.runs.push(withBaselines(run, (baseline) => baselines[baseline]!));
    }
    this.joinRuns();
    for (const { field, subarray, times } of other.visits.values()) {
      this.visitsOf(field, subarray).times.merge(times);
    }
    this.integrations.merge(other.integrations);
    this.rows += other.rows;
    this.badTimeRows += other.badTimeRows;
    this.badUvwRows += other.badUvwRows;
    this.wKnown ||= other.wKnown;
  }

  state(): StateRecord {
    const { rows, badTimeRows, badUvwRows, wKnown } = this;
    return {
      rows,
      badTimeRows,
      badUvwRows,
      wKnown,
      runs: Float64Array.from(this.runs.flatMap((run) => RUN_KEYS.map((key) => run[key]))),
      visits: this.fields.map(({ field, subarray, times }) => ({ field, subarray, times: times.state() })),
      integrations: this.integrations.state(),
    };
  }

  restore(from: StateReader): void {
    this.rows = from.integer("rows");
    this.badTimeRows = from.integer("badTimeRows");
    this.badUvwRows = from.integer("badUvwRows");
    this.wKnown = from.boolean("wKnown");
    const runs = from.array(Float64Array, "runs");
    for (let i = 0; i + RUN_KEYS.length <= runs.length; i += RUN_KEYS.length) {
      const run = newRun(0, 0);
      this.runs.push(Object.assign(run, Object.fromEntries(RUN_KEYS.map((key, k) => [key, runs[i + k]!]))));
    }
    for (const visits of from.child("visits").items()) {
      if (visits === null) throw from.error("a visit is missing", "visits");
      const [field, subarray] = ["field", "subarray"].map((key) => visits.integer(key, -LARGEST, LARGEST));
      this.visitsOf(field!, subarray!).times.restore(visits.child("times"));
    }
    this.integrations.restore(from.child("integrations"));
  }

  /** Make one run of those that follow each other. */
  private joinRuns(): void {
    this.runs.sort((a, b) => a.firstRow - b.firstRow);
    const joined: Run[] = [];
    for (const run of this.runs) {
      const before = joined.at(-1);
      if (before?.endRow === run.firstRow) follow(before, run);
      else joined.push(run);
    }
    this.runs = joined;
  }

  /**
   * Rows earlier than the row before them. In a dataset sorted by baseline, where each begins again at the first time,
   * only those of the same baseline count.
   */
  get backwardRows(): number {
    const all = newRun(0, 0);
    // Parts of a dataset that is not there whole follow each other too.
    for (const run of this.runs) follow(all, run);
    const byBaseline = all.same > this.rows / 2;
    return all.backwardSame + (byBaseline ? 0 : all.backward);
  }

  /** By field, then sub-array. */
  get fields(): readonly Visits[] {
    return [...this.visits.values()].sort((a, b) => a.field - b.field || a.subarray - b.subarray);
  }

  /** Median of what the rows say, seconds; NaN where they do not. */
  get integration(): number {
    return this.integrations.median;
  }
}

/** In the order of a state. */
const RUN_KEYS = [
  "firstRow",
  "endRow",
  "firstTime",
  "firstBaseline",
  "lastTime",
  "lastBaseline",
  "backward",
  "backwardSame",
  "same",
] as const satisfies readonly (keyof Run)[];
/** of 32-bit numbers */
const LARGEST = 2 ** 31;

function newRun(firstRow: number, rows: number): Run {
  return {
    firstRow,
    endRow: firstRow + rows,
    firstTime: Number.NaN,
    firstBaseline: -1,
    lastTime: Number.NaN,
    lastBaseline: -1,
    backward: 0,
    backwardSame: 0,
    same: 0,
  };
}

/** Above the numbers of baselines: which one a row is of that has no number. */
const FIRST_CODE = 2 ** 32;

function codeOf(antenna1: number, antenna2: number): number {
  const low = Math.min(antenna1, antenna2);
  // Exact for the numbers that antennas have; of damaged ones two may look the same.
  return FIRST_CODE + Math.abs(low * 65536 + (antenna1 + antenna2 - low));
}

/** A run with its baselines numbered otherwise. */
function withBaselines(run: Run, numberOf: (baseline: number) => number): Run {
  const known = (baseline: number) =>
    baseline < 0 || baseline >= FIRST_CODE ? baseline : numberOf(baseline);
  return { ...run, firstBaseline: known(run.firstBaseline), lastBaseline: known(run.lastBaseline) };
}

/** Note the next row with a time. */
function step(run: Run, time: number, baseline: number): void {
  const isSame = baseline === run.lastBaseline;
  if (isSame) run.same += 1;
  if (time < run.lastTime - TIME_STEP_DAYS) {
    if (isSame) run.backwardSame += 1;
    else run.backward += 1;
  }
  if (run.firstBaseline < 0) {
    run.firstTime = time;
    run.firstBaseline = baseline;
  }
  run.lastTime = time;
  run.lastBaseline = baseline;
}

/** Lengthen a run by the one that follows it. */
function follow(run: Run, next: Run): void {
  run.endRow = next.endRow;
  if (next.firstBaseline < 0) return;
  step(run, next.firstTime, next.firstBaseline);
  run.lastTime = next.lastTime;
  run.lastBaseline = next.lastBaseline;
  run.same += next.same;
  run.backward += next.backward;
  run.backwardSame += next.backwardSame;
}

/** Mantissa bits that tell integration times apart: two thousandths of an octave. */
const KEPT_BITS = 12;
const MERGED = 1 << (23 - KEPT_BITS);

/** How often each integration time occurs. */
class IntegrationCounts {
  private readonly value = new Float32Array(1);
  private readonly bits = new Int32Array(this.value.buffer);
  /** by the leading bits of the time: rows, the least and the largest */
  private readonly counts = new Map<number, { rows: number; least: number; most: number }>();
  private last = { rows: 0, least: Number.NaN, most: Number.NaN };

  add(seconds: number, rows: number): void {
    if (seconds === this.last.least && seconds === this.last.most) {
      this.last.rows += rows;
      return;
    }
    if (!(seconds > 0 && seconds < Number.POSITIVE_INFINITY)) return;
    this.value[0] = seconds;
    const key = Math.floor(this.bits[0]! / MERGED);
    let entry = this.counts.get(key);
    if (entry === undefined) {
      entry = { rows: 0, least: seconds, most: seconds };
      this.counts.set(key, entry);
    }
    entry.rows += rows;
    entry.least = Math.min(entry.least, seconds);
    entry.most = Math.max(entry.most, seconds);
    this.last = entry;
  }

  merge(other: IntegrationCounts): void {
    for (const { rows, least, most } of other.counts.values()) {
      this.add(least, rows);
      this.add(most, 0);
    }
  }

  state(): StateRecord {
    const entries = [...this.counts.values()];
    return {
      rows: Float64Array.from(entries, ({ rows }) => rows),
      least: Float64Array.from(entries, ({ least }) => least),
      most: Float64Array.from(entries, ({ most }) => most),
    };
  }

  restore(from: StateReader): void {
    const rows = from.counts(Float64Array, "rows");
    const least = from.finite(Float64Array, "least", rows.length);
    const most = from.finite(Float64Array, "most", rows.length);
    for (const [i, count] of rows.entries()) {
      this.add(least[i]!, count);
      this.add(most[i]!, 0);
    }
  }

  get median(): number {
    const sorted = [...this.counts].sort(([a], [b]) => a - b).map(([, entry]) => entry);
    const rows = sorted.reduce((sum, entry) => sum + entry.rows, 0);
    let below = 0;
    for (const { rows: own, least, most } of sorted) {
      below += own;
      if (2 * below >= rows) return (least + most) / 2;
    }
    return Number.NaN;
  }
}
