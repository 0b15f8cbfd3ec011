/** Which stored items of a row give which of its columns: group parameters, or columns of a table. */

/** value = constant + sum over terms of scale x stored */
export interface Sum {
  readonly constant: number;
  readonly terms: readonly Term[];
}

export interface Term {
  /** byte of the item in the row */
  readonly offset: number;
  readonly scale: number;
  /** type of the item */
  readonly bitpix: number;
}

export interface RowColumns {
  /** light travel, seconds */
  readonly u: Sum;
  readonly v: Sum;
  readonly w: Sum | undefined;
  /** MJD in the file's time system, days */
  readonly time: Sum;
  readonly baseline: Sum | undefined;
  readonly antenna1: Sum | undefined;
  readonly antenna2: Sum | undefined;
  readonly subarray: Sum | undefined;
  readonly integration: Sum | undefined;
  readonly source: Sum | undefined;
  readonly setup: Sum | undefined;
}

/** What goes with arrays that hold no weights: weights, and a scale, beside the array. */
export interface WeightColumns {
  /** one for all samples of a row, or several as the steps say; empty: every weight is 1 */
  readonly weights: readonly Sum[];
  /** from one sub-band, and from one polarization, to the next in `weights`; 0 where they share one */
  readonly subbandStep: number;
  readonly polarizationStep: number;
  /** what the stored values of a row are multiplied by */
  readonly scale: Sum | undefined;
}

/** The first word of a coordinate's name: `UU---SIN` is UU. */
export function isCoordinate(name: string, axis: string): boolean {
  return name.split("-")[0] === axis;
}

/** `UU`, `UU--`, `UU---SIN` are seconds; `UU-L`, `UU-L-SIN` wavelengths at the reference frequency. */
export function isInWavelengths(name: string): boolean {
  return name.split("-")[1] === "L";
}

export function dividedBy(sum: Sum, divisor: number): Sum {
  return {
    constant: sum.constant / divisor,
    terms: sum.terms.map((term) => ({ ...term, scale: term.scale / divisor })),
  };
}

/** The same columns where only parts of each row are at hand: `moved` says where a byte of the row is found now. */
export function movedColumns(columns: RowColumns, moved: (offset: number) => number): RowColumns {
  const move = (sum: Sum): Sum => movedSum(sum, moved);
  const moveAny = (sum: Sum | undefined): Sum | undefined => (sum === undefined ? undefined : move(sum));
  return {
    u: move(columns.u),
    v: move(columns.v),
    w: moveAny(columns.w),
    time: move(columns.time),
    baseline: moveAny(columns.baseline),
    antenna1: moveAny(columns.antenna1),
    antenna2: moveAny(columns.antenna2),
    subarray: moveAny(columns.subarray),
    integration: moveAny(columns.integration),
    source: moveAny(columns.source),
    setup: moveAny(columns.setup),
  };
}

export function movedSum(sum: Sum, moved: (offset: number) => number): Sum {
  return {
    constant: sum.constant,
    terms: sum.terms.map((term) => ({ ...term, offset: moved(term.offset) })),
  };
}
