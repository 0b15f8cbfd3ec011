/**
 * The arrays that a survey is of, each with its own tracks: sub-arrays that share no antenna look at different skies, and
 * frequency setups at different frequencies, so that one is no measure for the other.
 */
import { evenChoice, MOST_BASELINES } from "../../measure/even-choice.ts";
import type { Baseline, Levels, Survey, Tracks } from "../../measure/survey-result.ts";
import type { Cleaned } from "./grid.ts";

export interface OneArray {
  readonly survey: Survey;
  readonly cleaned: Cleaned | null;
}

/** The survey as it is where there is one array and one setup, and not too many baselines. */
export function arraysOf(survey: Survey, cleaned: Cleaned | null): OneArray[] {
  const { tracks, baselines } = survey;
  if (baselines.length > MOST_BASELINES) {
    const chosen = part(survey, cleaned, chosenCells(survey));
    return arraysOf(chosen.survey, chosen.cleaned);
  }
  const group = groupsOf(baselines);
  const cells = new Map<string, number[]>();
  let key = "";
  let list: number[] = [];
  for (let cell = 0; cell < tracks.cells; cell++) {
    const own = `${group[tracks.baseline[cell]!]} ${tracks.setup[cell]}`;
    if (own !== key) {
      key = own;
      list = cells.get(own) ?? [];
      cells.set(own, list);
    }
    list.push(cell);
  }
  if (cells.size < 2) return [{ survey, cleaned }];
  return [...cells.values()].map((own) => part(survey, cleaned, own));
}

/** Cells of an even choice of the baselines: faults of single ones are looked for on those alone. */
function chosenCells({ tracks, baselines }: Survey): number[] {
  const cells: number[] = [];
  for (const b of evenChoice(baselines)) {
    for (let cell = tracks.firstCell[b]!; cell < tracks.firstCell[b + 1]!; cell++) cells.push(cell);
  }
  return cells;
}

/** By baseline, which of the arrays without an antenna in common it belongs to. */
function groupsOf(baselines: readonly Baseline[]): Int32Array {
  const leader = new Map<number, number>();
  const leaderOf = (antenna: number): number => {
    let top = antenna;
    while (leader.get(top) !== undefined) top = leader.get(top)!;
    for (let at = antenna; at !== top; ) {
      const next = leader.get(at)!;
      leader.set(at, top);
      at = next;
    }
    return top;
  };
  for (const { antenna1, antenna2 } of baselines) {
    const [one, other] = [leaderOf(antenna1), leaderOf(antenna2)];
    if (one !== other) leader.set(Math.max(one, other), Math.min(one, other));
  }
  return Int32Array.from(baselines, ({ antenna1 }) => leaderOf(antenna1));
}

/** @param cells ascending, so sorted by baseline as all are */
function part(survey: Survey, cleaned: Cleaned | null, cells: readonly number[]): OneArray {
  const { tracks, dataset } = survey;
  const kept: number[] = [];
  const baseline = Int32Array.from(cells, (cell) => {
    const b = tracks.baseline[cell]!;
    if (kept.at(-1) !== b) kept.push(b);
    return kept.length - 1;
  });
  const firstCell = new Int32Array(kept.length + 1);
  for (const b of baseline) firstCell[b + 1]! += 1;
  for (let b = 0; b < kept.length; b++) firstCell[b + 1]! += firstCell[b]!;
  const { subbands, channels, polarizations } = dataset.shape;
  return {
    survey: {
      ...survey,
      baselines: kept.map((b) => survey.baselines[b]!),
      tracks: { ...tracksOf(tracks, cells, subbands * polarizations), baseline, firstCell },
      levels: levelsOf(survey.levels, kept, subbands * channels * polarizations),
    },
    cleaned: cleaned === null ? null : gatherAll(cleaned, cells, subbands * polarizations),
  };
}

function tracksOf(tracks: Tracks, cells: readonly number[], width: number): Tracks {
  const { cells: _, binSeconds, baseline, firstCell, time, u, v, w, ...rest } = tracks;
  const { field, setup, scan, subarray, integration, ...products } = rest;
  const columns = { time, u, v, w, field, setup, scan, subarray, integration };
  return {
    cells: cells.length,
    binSeconds,
    baseline,
    firstCell,
    ...gatherAll(columns, cells, 1),
    ...gatherAll(products, cells, width),
  };
}

function levelsOf(levels: Levels, baselines: readonly number[], width: number): Levels {
  return gatherAll({ ...levels }, baselines, width);
}

/** Copies of columns with the rows of `width` numbers that are kept; null and absent ones stay as they are. */
function gatherAll<C extends object>(columns: C, rows: readonly number[], width: number): C {
  const gathered = Object.entries(columns).map(([name, column]) => [name, gather(column, rows, width)]);
  return Object.fromEntries(gathered);
}

type Numbers = Float32Array | Float64Array | Int32Array | Uint32Array | Uint8Array;

function gather(column: Numbers | null | undefined, rows: readonly number[], width: number) {
  if (column === null || column === undefined) return column;
  const out = new (column.constructor as new (length: number) => Numbers)(rows.length * width);
  rows.forEach((row, i) => {
    for (let k = 0; k < width; k++) out[i * width + k] = column[row * width + k]!;
  });
  return out;
}
