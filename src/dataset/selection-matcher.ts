/**
 * Selections compiled for the hot loop: which of them a row belongs to, and which of its samples they take.
 */
import type { Dataset, SampleBlock, Shape } from "./dataset.ts";
import type { Selection } from "./selection.ts";

/** Selections ready to be asked row by row; one matcher serves one reader at a time. */
export interface SelectionMatcher {
  /** how many selections were compiled */
  readonly count: number;
  /** numbers of the selections that the last row asked belongs to, ascending; the first `matchRow` of them count */
  readonly matched: Int32Array;
  /** by selection: [start, end) pairs of sample offsets within a row, ascending and disjoint */
  readonly runs: readonly Int32Array[];
  /** How many selections take samples of this row; their numbers are in `matched`. */
  matchRow(block: SampleBlock, row: number): number;
}

/** The parts of a selection that a row decides. */
interface RowTest {
  /** -Infinity..Infinity when the selection names no time: then a row without a time matches too */
  readonly start: number;
  readonly end: number;
  readonly anyTime: boolean;
  readonly fields: ReadonlySet<number> | null;
}

/**
 * Compile selections against a dataset's shape. Channels, sub-bands and polarizations that the dataset does not
 * have select nothing; a row whose time is NaN belongs to no selection that names a time.
 */
export function compileSelections(
  dataset: Pick<Dataset, "shape" | "polarizations">,
  selections: readonly Selection[],
): SelectionMatcher {
  const runs = selections.map((selection) => runsOf(dataset, selection));
  const tests = selections.map(rowTest);
  const baselineTests = selections.map(baselineTest);
  const matched = new Int32Array(selections.length);
  // Baselines are few and rows are many: which selections can concern a baseline is decided once for each.
  const candidates = new Map<number, (Int32Array | undefined)[]>();
  // There may be millions of baselines, and hardly two kinds of them: each list is there once.
  const lists = new Map<string, Int32Array>();

  const candidatesOf = (antenna1: number, antenna2: number): Int32Array => {
    let ofFirst = candidates.get(antenna1);
    if (ofFirst === undefined) {
      ofFirst = [];
      candidates.set(antenna1, ofFirst);
    }
    let found = ofFirst[antenna2];
    if (found === undefined) {
      const numbers: number[] = [];
      for (let s = 0; s < selections.length; s++) {
        if (runs[s]!.length > 0 && baselineTests[s]!(antenna1, antenna2)) numbers.push(s);
      }
      const key = numbers.join();
      found = lists.get(key) ?? Int32Array.from(numbers);
      lists.set(key, found);
      ofFirst[antenna2] = found;
    }
    return found;
  };

  return {
    count: selections.length,
    matched,
    runs,
    matchRow(block, row) {
      const possible = candidatesOf(block.antenna1[row]!, block.antenna2[row]!);
      const time = block.time[row]!;
      const field = block.field[row]!;
      let count = 0;
      for (let i = 0; i < possible.length; i++) {
        const s = possible[i]!;
        const test = tests[s]!;
        if (!test.anyTime && !(time >= test.start && time <= test.end)) continue;
        if (test.fields !== null && !test.fields.has(field)) continue;
        matched[count] = s;
        count += 1;
      }
      return count;
    },
  };
}

function rowTest(selection: Selection): RowTest {
  const { time, fields } = selection;
  return {
    start: time === null ? Number.NEGATIVE_INFINITY : time[0],
    end: time === null ? Number.POSITIVE_INFINITY : time[1],
    anyTime: time === null,
    fields: fields === null ? null : new Set(fields),
  };
}

function baselineTest(selection: Selection): (antenna1: number, antenna2: number) => boolean {
  const antennas = selection.antennas === null ? null : new Set(selection.antennas);
  const partners = selection.baselines === null ? null : partnersOf(selection.baselines);
  return (antenna1, antenna2) => {
    if (antennas !== null && !antennas.has(antenna1) && !antennas.has(antenna2)) return false;
    return partners === null || partners.get(antenna1)?.has(antenna2) === true;
  };
}

/** By antenna, the other ends of the baselines, either way round. */
function partnersOf(baselines: readonly (readonly [number, number])[]): Map<number, Set<number>> {
  const partners = new Map<number, Set<number>>();
  const add = (from: number, to: number) => {
    const known = partners.get(from);
    if (known === undefined) partners.set(from, new Set([to]));
    else known.add(to);
  };
  for (const [a, b] of baselines) {
    add(a, b);
    add(b, a);
  }
  return partners;
}

/** [start, end) pairs of the samples of a row that the selection takes. */
function runsOf(dataset: Pick<Dataset, "shape" | "polarizations">, selection: Selection): Int32Array {
  const { shape } = dataset;
  const subbands = indices(shape.subbands, selection.subbands);
  const channels = channelMask(shape.channels, selection.channels);
  const wanted = selection.polarizations;
  const polarizations = dataset.polarizations.map((name) => wanted === null || wanted.includes(name));
  if (selection.antennas?.length === 0 || selection.baselines?.length === 0) return new Int32Array(0);
  if (selection.fields?.length === 0) return new Int32Array(0);
  return runsOfMask(shape, subbands, channels, polarizations);
}

function runsOfMask(
  shape: Shape,
  subbands: readonly boolean[],
  channels: readonly boolean[],
  polarizations: readonly boolean[],
): Int32Array {
  const bounds: number[] = [];
  let offset = 0;
  for (let subband = 0; subband < shape.subbands; subband++) {
    for (let channel = 0; channel < shape.channels; channel++) {
      for (let p = 0; p < shape.polarizations; p++, offset++) {
        if (!(subbands[subband] && channels[channel] && polarizations[p])) continue;
        if (bounds.length > 0 && bounds.at(-1) === offset) bounds[bounds.length - 1] = offset + 1;
        else bounds.push(offset, offset + 1);
      }
    }
  }
  return Int32Array.from(bounds);
}

function indices(count: number, wanted: readonly number[] | null): boolean[] {
  const mask = new Array<boolean>(count).fill(wanted === null);
  for (const index of wanted ?? []) {
    if (index >= 0 && index < count) mask[index] = true;
  }
  return mask;
}

function channelMask(count: number, ranges: readonly (readonly [number, number])[] | null): boolean[] {
  const mask = new Array<boolean>(count).fill(ranges === null);
  for (const [low, high] of ranges ?? []) {
    for (let channel = Math.max(0, low); channel <= Math.min(count - 1, high); channel++)
      mask[channel] = true;
  }
  return mask;
}
