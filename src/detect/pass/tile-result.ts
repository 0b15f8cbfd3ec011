/**
 * What the second pass finds in one tile: plain arrays, that one thread makes and another adds up.
 *
 * To share a second pass out: the main thread asks `choose(survey)` for the choice, and `choice.looks` for the numbers of
 * the tiles to be read (`tilesToRead`). A worker that has the survey makes one `TileAnalysis(survey, choice)`, asks it for
 * `await analysis.tile(number)` of each of its tiles, and posts the results; all their buffers (`buffersOf`) may be
 * transferred. The main thread gives the results to `PassSum.add` in ascending order of tile, and `PassSum.finish` is the
 * second pass, the same to the last bit however the tiles were shared out.
 */

/** Bits a sample, (rows x words of a row). */
export interface RowMarks {
  readonly usable: Uint32Array<ArrayBuffer>;
  readonly elevated: Uint32Array<ArrayBuffer>;
  readonly outlying: Uint32Array<ArrayBuffer>;
  readonly bright: Uint32Array<ArrayBuffer>;
}

/** Sums of scores over baselines: (groups by length x steps x channels of all sub-bands x polarizations). */
export interface ScoreSums {
  /** index of the first integration, or bin of integrations */
  readonly firstStep: number;
  readonly steps: number;
  readonly sums: Int32Array<ArrayBuffer>;
  readonly counts: Uint32Array<ArrayBuffer>;
}

/** (rows x subbands x polarizations) means over channels without what stands out; `count` 0 where there is none. */
export interface RowMeans {
  readonly real: Float32Array<ArrayBuffer>;
  readonly imag: Float32Array<ArrayBuffer>;
  /** mean of V(c+1) V*(c) */
  readonly slopeReal: Float32Array<ArrayBuffer>;
  readonly slopeImag: Float32Array<ArrayBuffer>;
  readonly count: Float32Array<ArrayBuffer>;
  /** 2 sigma^2 of one sample; NaN where it cannot be told */
  readonly noise: Float32Array<ArrayBuffer>;
}

/** (channels of all sub-bands x polarizations) planes by their spectral kurtosis. */
export interface KurtosisTallies {
  readonly planes: Uint32Array<ArrayBuffer>;
  readonly steady: Uint32Array<ArrayBuffer>;
  readonly unsteady: Uint32Array<ArrayBuffer>;
}

export interface TileResult {
  readonly tile: number;
  /** (rows looked at) cell of the tracks; then (rows only averaged) the same */
  readonly cells: Int32Array<ArrayBuffer>;
  /** rows looked at */
  readonly seen: number;
  /** of the rows looked at; null where no bits are kept */
  readonly marks: RowMarks | null;
  /** of baselines looked at with all others, and of those in a sample; null where there are none */
  readonly scores: ScoreSums | null;
  readonly sampled: ScoreSums | null;
  readonly kurtosis: KurtosisTallies;
  /** of all rows in `cells` */
  readonly means: RowMeans;
}

export function newMeans(size: number): RowMeans {
  const column = () => new Float32Array(size);
  return {
    real: column(),
    imag: column(),
    slopeReal: column(),
    slopeImag: column(),
    count: column(),
    noise: column(),
  };
}

export function newMarks(size: number): RowMarks {
  const column = () => new Uint32Array(size);
  return { usable: column(), elevated: column(), outlying: column(), bright: column() };
}

/** The first rows of some means and then those of others. */
export function joinMeans(
  first: RowMeans,
  firstSize: number,
  second: RowMeans,
  secondSize: number,
): RowMeans {
  const joined = newMeans(firstSize + secondSize);
  for (const name of ["real", "imag", "slopeReal", "slopeImag", "count", "noise"] as const) {
    joined[name].set(first[name].subarray(0, firstSize));
    joined[name].set(second[name].subarray(0, secondSize), firstSize);
  }
  return joined;
}
