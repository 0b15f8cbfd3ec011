/**
 * SumThreshold: runs of samples in time or frequency whose mean is too high, the longer the run the lower the bar.
 * @see Offringa et al. 2010, MNRAS 405, 155
 */

export interface SumThresholdSettings {
  /** threshold of a single sample, sigmas */
  readonly first: number;
  /** thresholds fall by this with every doubling of the run; 1.5 in the paper */
  readonly ratio: number;
  /** longest runs along rows (time) and along columns (frequency), samples */
  readonly longestTime: number;
  readonly longestFrequency: number;
}

/** Threshold of the mean of a run of `length` samples: first / ratio^(log2 length). */
export function runThreshold({ first, ratio }: SumThresholdSettings, length: number): number {
  return first / ratio ** Math.log2(length);
}

/** Working room of `sumThreshold`, kept by the caller so that nothing is made a plane. */
export class SumThresholdRoom {
  sums = new Float64Array(0);
  counts = new Int32Array(0);
  marked = new Int32Array(0);
  fresh = new Uint8Array(0);

  fit(rows: number, columns: number): void {
    if (this.sums.length < columns) {
      this.sums = new Float64Array(columns);
      this.counts = new Int32Array(columns);
      this.marked = new Int32Array(columns);
    }
    if (this.fresh.length < rows * columns) this.fresh = new Uint8Array(rows * columns);
  }
}

/**
 * Mark runs of scores whose mean exceeds the threshold of their length. Only upwards: a score is of power, and
 * interference adds power. What is marked already is left out of sums and counts; marks of one length, in both
 * directions, count from the next length on.
 *
 * @param scores (rows x columns) time by frequency, zero mean and unit variance in noise, columns adjacent in memory
 * @param marks  (rows x columns) in: 1 marked, 2 no sample; out: 1 where a run was found too
 */
export function sumThreshold(
  scores: Float32Array,
  marks: Uint8Array,
  rows: number,
  columns: number,
  settings: SumThresholdSettings,
  room = new SumThresholdRoom(),
): void {
  room.fit(rows, columns);
  const size = rows * columns;
  // Most planes have nothing missing and nothing found: their runs need no counting.
  let clean = true;
  for (let i = 0; i < size && clean; i++) clean = marks[i] === 0;
  for (let length = 1; length <= Math.max(rows, columns); length *= 2) {
    const alongTime = length <= rows && length <= settings.longestTime;
    const alongFrequency = length > 1 && length <= columns && length <= settings.longestFrequency;
    if (!alongTime && !alongFrequency) continue;
    const threshold = runThreshold(settings, length);
    if (length === 1) {
      for (let i = 0; i < size; i++) {
        if (!(scores[i]! > threshold) || marks[i] !== 0) continue;
        marks[i] = 1;
        clean = false;
      }
      continue;
    }
    if (clean) {
      clean =
        !(alongTime && anyRunInTime(scores, rows, columns, length, threshold, room.sums)) &&
        !(alongFrequency && anyRunInFrequency(scores, rows, columns, length, threshold));
      if (clean) continue;
    }
    const { fresh } = room;
    let found = 0;
    fresh.fill(0, 0, size);
    if (alongTime) found += runsInTime(scores, marks, rows, columns, length, threshold, room);
    if (alongFrequency) found += runsInFrequency(scores, marks, rows, columns, length, threshold, fresh);
    if (found === 0) continue;
    for (let i = 0; i < size; i++) if (fresh[i] === 1 && marks[i] === 0) marks[i] = 1;
  }
}

/** Whether any run along time exceeds the threshold, all samples being good. */
function anyRunInTime(
  scores: Float32Array,
  rows: number,
  columns: number,
  length: number,
  threshold: number,
  sums: Float64Array,
): boolean {
  const limit = threshold * length;
  sums.fill(0, 0, columns);
  for (let i = 0, end = (length - 1) * columns; i < end; i += columns) {
    for (let column = 0; column < columns; column++) sums[column]! += scores[i + column]!;
  }
  let highest = limit;
  for (let row = length - 1; row < rows; row++) {
    const at = row * columns;
    const leaving = at - (length - 1) * columns;
    for (let column = 0; column < columns; column++) {
      const sum = sums[column]! + scores[at + column]!;
      if (sum > highest) highest = sum;
      sums[column] = sum - scores[leaving + column]!;
    }
  }
  return highest > limit;
}

/** The same along frequency. */
function anyRunInFrequency(
  scores: Float32Array,
  rows: number,
  columns: number,
  length: number,
  threshold: number,
): boolean {
  const limit = threshold * length;
  let highest = limit;
  for (let row = 0; row < rows; row++) {
    const start = row * columns;
    let sum = 0;
    for (let i = start; i < start + length - 1; i++) sum += scores[i]!;
    for (let i = start + length - 1; i < start + columns; i++) {
      sum += scores[i]!;
      if (sum > highest) highest = sum;
      sum -= scores[i - length + 1]!;
    }
  }
  return highest > limit;
}

function runsInTime(
  scores: Float32Array,
  marks: Uint8Array,
  rows: number,
  columns: number,
  length: number,
  threshold: number,
  { sums, counts, marked, fresh }: SumThresholdRoom,
): number {
  sums.fill(0, 0, columns);
  counts.fill(0, 0, columns);
  marked.fill(-1, 0, columns);
  let found = 0;
  for (let row = 0; row < rows; row++) {
    const at = row * columns;
    const leaving = at - length * columns;
    for (let column = 0; column < columns; column++) {
      if (marks[at + column] === 0) {
        sums[column]! += scores[at + column]!;
        counts[column]! += 1;
      }
      if (leaving >= 0 && marks[leaving + column] === 0) {
        sums[column]! -= scores[leaving + column]!;
        counts[column]! -= 1;
      }
      if (row + 1 >= length && sums[column]! > threshold * counts[column]! && counts[column]! > 0) {
        // Runs overlap: each row is marked once.
        for (let r = Math.max(marked[column]! + 1, row - length + 1); r <= row; r++) {
          fresh[r * columns + column] = 1;
        }
        marked[column] = row;
        found += 1;
      }
    }
  }
  return found;
}

function runsInFrequency(
  scores: Float32Array,
  marks: Uint8Array,
  rows: number,
  columns: number,
  length: number,
  threshold: number,
  fresh: Uint8Array,
): number {
  let found = 0;
  for (let row = 0; row < rows; row++) {
    const start = row * columns;
    let sum = 0;
    let count = 0;
    let marked = -1;
    for (let column = 0; column < columns; column++) {
      if (marks[start + column] === 0) {
        sum += scores[start + column]!;
        count += 1;
      }
      if (column >= length && marks[start + column - length] === 0) {
        sum -= scores[start + column - length]!;
        count -= 1;
      }
      if (column + 1 >= length && sum > threshold * count && count > 0) {
        const from = Math.max(marked + 1, column - length + 1);
        fresh.fill(1, start + from, start + column + 1);
        marked = column;
        found += 1;
      }
    }
  }
  return found;
}
