/** Which rows there are, in which order: row number to integration and baseline, without a table of all rows. */
import { InputError } from "../util/errors.ts";
import { type RowFault, rowFaults } from "./faults/compile.ts";
import type { Observation } from "./observation.ts";

/**
 * Rows in runs: in time-baseline order a run is one integration and its baselines, in baseline-time order one
 * baseline and its integrations. An entry below zero, ~index, is a second copy of the entry before it.
 */
export class Schedule {
  readonly rows: number;
  private readonly byTime: boolean;
  private readonly leader: Int32Array;
  private readonly members: readonly Int32Array[];
  /** (runs + 1) first row of each run */
  private readonly start: Float64Array;
  private run = 0;

  constructor(observation: Observation) {
    const faults = rowFaults(observation);
    this.byTime = observation.scenario.order === "time-baseline";
    const order = integrationOrder(observation.times.length, faults);
    this.leader = this.byTime ? order : Int32Array.from({ length: observation.baselines }, (_, b) => b);
    const members = memberLists(observation, faults, order, this.byTime);
    this.members = Array.from(this.leader, members);
    this.start = new Float64Array(this.members.length + 1);
    this.members.forEach((list, i) => {
      this.start[i + 1] = this.start[i]! + list.length;
    });
    this.rows = this.start.at(-1)!;
    if (this.rows === 0) {
      throw new InputError("the faults leave no row", { part: "scenario, faults" }, "Remove fewer rows");
    }
  }

  /** Where row `row` (0 <= row < rows) stands, into `out`; quick when asked in order. */
  locate(row: number, out: RowPlace): void {
    let { run } = this;
    const { start } = this;
    if (row < start[run]! || row >= start[run + 1]!) {
      run = row === start[run + 1]! ? run + 1 : search(start, row);
      while (row >= start[run + 1]!) run += 1;
      this.run = run;
    }
    const member = this.members[run]![row - start[run]!]!;
    out.copy = member < 0;
    const index = out.copy ? ~member : member;
    out.time = this.byTime ? this.leader[run]! : index;
    out.baseline = this.byTime ? index : this.leader[run]!;
  }
}

export interface RowPlace {
  time: number;
  baseline: number;
  /** a second copy of the row before it */
  copy: boolean;
}

/** Last run that starts at or before the row. */
function search(start: Float64Array, row: number): number {
  let low = 0;
  let high = start.length - 2;
  while (low < high) {
    const middle = (low + high + 1) >> 1;
    if (start[middle]! <= row) low = middle;
    else high = middle - 1;
  }
  return low;
}

function integrationOrder(integrations: number, faults: readonly RowFault[]): Int32Array {
  const order = Int32Array.from({ length: integrations }, (_, t) => t);
  for (const { kind, times } of faults) {
    if (kind === "reversed-rows") order.subarray(times.indexOf(1), times.lastIndexOf(1) + 1).reverse();
  }
  return order;
}

/** The list of each leader, shared between leaders that the same faults concern. */
function memberLists(
  observation: Observation,
  faults: readonly RowFault[],
  order: Int32Array,
  byTime: boolean,
): (leader: number) => Int32Array {
  const all = byTime ? Int32Array.from({ length: observation.baselines }, (_, b) => b) : order;
  const known = new Map<string, Int32Array>();
  return (leader) => {
    const active = faults.filter(
      ({ kind, times, baselines }) =>
        kind !== "reversed-rows" && (byTime ? times[leader] : baselines[leader]) === 1,
    );
    const key = active.map((fault) => faults.indexOf(fault)).join(",");
    const list = known.get(key) ?? listOf(all, active, byTime);
    known.set(key, list);
    return list;
  };
}

function listOf(all: Int32Array, active: readonly RowFault[], byTime: boolean): Int32Array {
  const list: number[] = [];
  for (const member of all) {
    const here = active.filter(({ times, baselines }) => (byTime ? baselines[member] : times[member]) === 1);
    if (here.some(({ kind }) => kind === "missing-rows")) continue;
    list.push(member);
    if (here.some(({ kind }) => kind === "duplicate-rows")) list.push(~member);
  }
  return Int32Array.from(list);
}
