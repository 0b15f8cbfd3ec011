/**
 * Which spacings and directions a set of samples covers: counts in fine bins of log radius, and of direction within
 * annuli. Counts add and subtract exactly, so the coverage that a selection leaves is the difference of two tallies.
 */

const RADIAL_BINS = 4096;
/** Bins of direction over half a turn: a quarter of a degree each. */
const DIRECTION_BINS = 720;
/** An annulus is an octave of spacing, or a little less; it holds at least this share of the samples. */
const MOST_ANNULI = 24;
const LEAST_SHARE = 0.05;

export interface CoverageForm {
  /** wavelengths: no sample is below or above */
  readonly shortest: number;
  readonly longest: number;
  /** wavelengths: the plan's scales, between which annuli are made */
  readonly from: number;
  readonly to: number;
}

export interface RadialGap {
  /** wavelengths */
  readonly from: number;
  readonly to: number;
}

export interface Annulus {
  /** wavelengths */
  readonly from: number;
  readonly to: number;
  readonly empty: boolean;
  /** widest range without a sample, radians of half a turn; its middle, north through east, 0..pi */
  readonly gap: number;
  readonly at: number;
}

/** The counts of a tally as plain data. */
export interface CoverageState {
  readonly radial: Int32Array;
  readonly through: Int32Array;
  readonly least: Float64Array;
  readonly most: Float64Array;
  readonly directions: Int32Array;
}

export class CoverageTally {
  readonly form: CoverageForm;
  private readonly low: number;
  private readonly binsPerLog: number;
  /** (RADIAL_BINS + 1) differences of the counts from bin to bin */
  private readonly radial = new Int32Array(RADIAL_BINS + 1);
  /** (RADIAL_BINS + 1) the same of the samples whose range goes through the whole bin */
  private readonly through = new Int32Array(RADIAL_BINS + 1);
  /** (RADIAL_BINS) smallest and largest log radius of an end of a sample's range in the bin */
  private readonly least = new Float64Array(RADIAL_BINS).fill(Number.POSITIVE_INFINITY);
  private readonly most = new Float64Array(RADIAL_BINS).fill(Number.NEGATIVE_INFINITY);
  private readonly annuli: number;
  private readonly annulusLow: number;
  private readonly annuliPerLog: number;
  private readonly directions: Int32Array;

  constructor(form: CoverageForm) {
    this.form = form;
    const margin = Math.log(1.001);
    this.low = Math.log(form.shortest) - margin;
    const range = Math.log(form.longest) + margin - this.low;
    this.binsPerLog = RADIAL_BINS / range;
    const planned = Math.log(form.to / form.from);
    this.annuli = planned > 0 ? Math.min(MOST_ANNULI, Math.ceil(planned / Math.LN2)) : 0;
    this.annulusLow = Math.log(form.from);
    this.annuliPerLog = this.annuli / planned;
    this.directions = new Int32Array(Math.max(0, this.annuli) * DIRECTION_BINS);
  }

  /**
   * Count (or with -1 take out) samples of one row: a range of radii in one direction.
   *
   * @param low,high natural log of the radii in wavelengths, low <= high
   * @param direction of (u, v), north (v) through east (u), radians
   */
  add(low: number, high: number, direction: number, count = 1): void {
    // Spacings below the shortest are of antennas at one place.
    if (!(high >= this.low && high < Number.POSITIVE_INFINITY)) return;
    this.addRadial(Math.max(low, this.low), high, count);
    const first = Math.max(0, Math.floor((low - this.annulusLow) * this.annuliPerLog));
    const last = Math.min(this.annuli - 1, Math.floor((high - this.annulusLow) * this.annuliPerLog));
    if (first > last || high < this.annulusLow) return;
    const turn = direction / Math.PI;
    const bin = Math.min(DIRECTION_BINS - 1, Math.floor((turn - Math.floor(turn)) * DIRECTION_BINS));
    for (let annulus = first; annulus <= last; annulus++)
      this.directions[annulus * DIRECTION_BINS + bin]! += count;
  }

  private addRadial(low: number, high: number, count: number): void {
    const first = this.bin(low);
    const last = this.bin(high);
    this.radial[first]! += count;
    this.radial[last + 1]! -= count;
    if (last > first + 1) {
      this.through[first + 1]! += count;
      this.through[last]! -= count;
    }
    if (count < 0) return;
    if (low < this.least[first]!) this.least[first] = low;
    if (first === last) {
      if (high > this.most[first]!) this.most[first] = high;
      return;
    }
    this.most[first] = Number.POSITIVE_INFINITY;
    this.least[last] = Number.NEGATIVE_INFINITY;
    if (high > this.most[last]!) this.most[last] = high;
  }

  private bin(log: number): number {
    return Math.min(RADIAL_BINS - 1, Math.max(0, Math.floor((log - this.low) * this.binsPerLog)));
  }

  /** All that it counts, for another thread. It is not to be used after. */
  state(): CoverageState {
    const { radial, through, least, most, directions } = this;
    return { radial, through, least, most, directions };
  }

  /** Add what another thread has counted in a tally of the same form. */
  merge(other: CoverageState): void {
    addInto(this.radial, other.radial);
    addInto(this.through, other.through);
    addInto(this.directions, other.directions);
    for (let bin = 0; bin < RADIAL_BINS; bin++) {
      this.least[bin] = Math.min(this.least[bin]!, other.least[bin]!);
      this.most[bin] = Math.max(this.most[bin]!, other.most[bin]!);
    }
  }

  /** The same counts with the edges of gaps at those of bins. */
  binned(): CoverageTally {
    return this.without(new CoverageTally(this.form));
  }

  /** The tally with the samples of `other` added; both of one form. Edges of gaps are then those of bins. */
  with(other: CoverageTally): CoverageTally {
    const all = new CoverageTally(this.form);
    for (let i = 0; i < all.radial.length; i++) all.radial[i] = this.radial[i]! + other.radial[i]!;
    for (let i = 0; i < all.directions.length; i++)
      all.directions[i] = this.directions[i]! + other.directions[i]!;
    all.through.set(all.radial);
    return all;
  }

  /** The tally with the samples of `other` taken out; both of one form. Edges of gaps are then those of bins. */
  without(other: CoverageTally): CoverageTally {
    const left = new CoverageTally(this.form);
    for (let i = 0; i < left.radial.length; i++) left.radial[i] = this.radial[i]! - other.radial[i]!;
    // What is left has no edges of its own: every covered bin counts as a whole.
    left.through.set(left.radial);
    for (let i = 0; i < left.directions.length; i++) {
      left.directions[i] = this.directions[i]! - other.directions[i]!;
    }
    return left;
  }

  /** The log radii that each bin's samples reach from and to; NaN where it has none. */
  private reaches(): { readonly from: Float64Array; readonly to: Float64Array } {
    const from = new Float64Array(RADIAL_BINS).fill(Number.NaN);
    const to = new Float64Array(RADIAL_BINS).fill(Number.NaN);
    let [count, whole] = [0, 0];
    for (let bin = 0; bin < RADIAL_BINS; bin++) {
      count += this.radial[bin]!;
      whole += this.through[bin]!;
      if (count <= 0) continue;
      const low = this.low + bin / this.binsPerLog;
      const high = this.low + (bin + 1) / this.binsPerLog;
      from[bin] = whole > 0 ? low : Math.max(low, this.least[bin]!);
      to[bin] = whole > 0 ? high : Math.min(high, this.most[bin]!);
    }
    return { from, to };
  }

  /** Shortest and longest covered radius, wavelengths; NaN when nothing is. */
  extent(): { readonly shortest: number; readonly longest: number } {
    const { from, to } = this.reaches();
    const known = (log: number) => !Number.isNaN(log);
    return {
      shortest: Math.exp(from.find(known) ?? Number.NaN),
      longest: Math.exp(to.findLast(known) ?? Number.NaN),
    };
  }

  /** Ranges without samples between the shortest and the longest, wider than `least` wavelengths. */
  radialGaps(least: number): RadialGap[] {
    const { from, to } = this.reaches();
    const gaps: RadialGap[] = [];
    let before = Number.NaN;
    for (let bin = 0; bin < RADIAL_BINS; bin++) {
      if (Number.isNaN(from[bin]!)) continue;
      const gap = { from: Math.exp(before), to: Math.exp(from[bin]!) };
      if (gap.to - gap.from > least) gaps.push(gap);
      before = to[bin]!;
    }
    return gaps;
  }

  /**
   * The annuli between the plan's scales, each with its widest gap that is longer than `least` wavelengths. Octaves
   * with few samples, as the innermost are, join their neighbours: a direction that one track misses is no gap.
   */
  azimuthalGaps(least: number): Annulus[] {
    return this.groups().map(({ first, last, counts }) => {
      const from = Math.exp(this.annulusLow + first / this.annuliPerLog);
      const to = Math.exp(this.annulusLow + (last + 1) / this.annuliPerLog);
      const { width, middle } = widestGap(counts);
      const gap = (width * Math.PI) / DIRECTION_BINS;
      const long = gap * Math.sqrt(from * to) > least;
      return {
        from,
        to,
        empty: width === DIRECTION_BINS,
        gap: long ? gap : 0,
        at: long ? (middle * Math.PI) / DIRECTION_BINS : Number.NaN,
      };
    });
  }

  /** Neighbouring octaves joined until each group holds enough of the samples; the last takes what is left. */
  private groups(): { first: number; last: number; counts: Int32Array }[] {
    const total = this.directions.reduce((sum, count) => sum + count, 0);
    const groups: { first: number; last: number; counts: Int32Array }[] = [];
    let enough = true;
    for (let annulus = 0; annulus < this.annuli; annulus++) {
      const own = this.directions.subarray(annulus * DIRECTION_BINS, (annulus + 1) * DIRECTION_BINS);
      if (enough) groups.push({ first: annulus, last: annulus, counts: new Int32Array(DIRECTION_BINS) });
      const group = groups.at(-1)!;
      addInto(group.counts, own);
      group.last = annulus;
      enough = sumOf(group.counts) >= LEAST_SHARE * total;
    }
    if (!enough && groups.length > 1) {
      const { last, counts } = groups.pop()!;
      addInto(groups.at(-1)!.counts, counts);
      groups.at(-1)!.last = last;
    }
    return groups;
  }
}

function addInto(to: Int32Array, from: Int32Array): void {
  for (let i = 0; i < to.length; i++) to[i]! += from[i]!;
}

function sumOf(counts: Int32Array): number {
  return counts.reduce((sum, count) => sum + count, 0);
}

/** Longest run of empty bins on the circle: its width less the half bin that each neighbour may reach into it. */
function widestGap(counts: Int32Array): { width: number; middle: number } {
  const size = counts.length;
  const start = counts.findIndex((count) => count > 0);
  if (start < 0) return { width: size, middle: size / 2 };
  let best = 0;
  let middle = Number.NaN;
  let run = 0;
  for (let step = 1; step <= size; step++) {
    if (counts[(start + step) % size]! > 0) {
      if (run > best) {
        best = run;
        middle = (start + step - run / 2) % size;
      }
      run = 0;
    } else run += 1;
  }
  // Samples stand on average in the middle of their bins.
  return { width: best === 0 ? 0 : best + 1, middle };
}
