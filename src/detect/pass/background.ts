/**
 * What a plane would hold without interference: in each integration one complex amplitude times the shape of the band,
 * and where needed sources away from the phase centre. Nothing is assumed of how the amplitude goes from one
 * integration to the next, so that wander, jumps, deep nulls, transits and gain steps are background, not outliers.
 */
import { Bandpass } from "./bandpass.ts";
import { DelayTerms } from "./delays.ts";
import { Plane } from "./plane.ts";
import { INLIER, RowFit } from "./row-fit.ts";
import { misfit } from "./waves.ts";

/** Integrations that share their slopes along the band: few show what drifts, many what is faint. */
const BLOCKS = [8, 32, 128];
const BLOCK_ROWS = 8;
/** Misfit of a block over that of noise, in units of its square root, from which one amplitude a row is not enough. */
const MISFIT = 1.5;
/** The same of a plane from which on the shape of its band is doubted. */
const BAD = 1.06;
const SHAPE_ROUNDS = 2;
/** Channels from which on the amplitude of a row may change along the band, */
const TILT_COLUMNS = 8;
/** where a source at the edge of sight could be as bright as all there is, and would then be off by this many sigmas. */
const LEAST_RUN = 0.2;
/** Of that change, what is likely of all the sources in sight together. */
const LIKELY_RUN = 0.3;
/** A channel does not tell the amplitude of a block if this share of its samples exceed this power (of noise, 5 in 100), */
const HELD_SHARE = 0.6;
const HELD_POWER = 3;
/** unless that is so of more channels than this share, or of both ends of the band: then it is the background that is wrong. */
const MOST_HELD = 0.5;
/** Mark of `Plane.held` for a sample that does not tell the background. */
const OUT = 1;

export class Background {
  readonly bandpass = new Bandpass();
  private readonly rows = new RowFit(this.bandpass);
  private readonly delays = new DelayTerms();
  private kept: Pick<Plane, "modelReal" | "modelImag" | "power"> = new Plane();
  /** (rows) complex amplitudes that describe a row */
  private terms = new Uint8Array(0);
  private keptTerms = new Uint8Array(0);
  private workReal = new Float64Array(0);
  private workImag = new Float64Array(0);
  private norms = new Float64Array(0);
  private limits = new Float64Array(0);
  private counts = new Int32Array(0);

  /**
   * Fill the plane's model and `power`, |V - model|^2 made up for the noise that the model took.
   *
   * @param noise    2 sigma^2 of a sample, about
   * @param steepest (rows) radians a column that a source in sight can cause
   * @param swiftest radians an integration by which it can turn the phase
   */
  fit(plane: Plane, noise: number, steepest: (row: number) => number, swiftest: number): void {
    const { rows, columns } = plane;
    this.resize(rows, columns);
    this.fitShapes(plane, noise, steepest, swiftest);
    const leverage = this.rows.leverage(columns);
    const base = this.rows.tilted ? 2 : 1;
    for (let row = 0; row < rows; row++) {
      const sloped = this.terms[row]! > base;
      const even = columns / Math.max(1, columns - this.terms[row]!);
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        plane.power[i]! *= sloped ? even : leverage[c]!;
      }
    }
  }

  private resize(rows: number, columns: number): void {
    this.rows.resize(columns);
    if (this.terms.length < rows) {
      this.terms = new Uint8Array(rows);
      this.keptTerms = new Uint8Array(rows);
    }
    if (this.workReal.length >= columns) return;
    this.workReal = new Float64Array(columns);
    this.workImag = new Float64Array(columns);
    this.norms = new Float64Array(columns);
    this.limits = new Float64Array(columns);
    this.counts = new Int32Array(columns);
  }

  private fitShapes(plane: Plane, noise: number, steepest: (row: number) => number, swiftest: number): void {
    const { rows, columns } = plane;
    this.bandpass.fit(plane, noise, swiftest);
    // How far the phase of a source at the edge of sight runs from the middle of the band to its end.
    const change = this.bandpass.amplitude * Math.min(1, 0.5 * columns * steepest(0));
    this.rows.tilted = columns >= TILT_COLUMNS && change > LEAST_RUN * Math.sqrt(noise);
    this.rows.stiffness = noise / (LIKELY_RUN * change) ** 2;
    this.fitRows(plane, noise);
    for (let round = 0; this.bandpass.fitted && round < SHAPE_ROUNDS; round++) {
      this.refineBandpass(plane, noise);
      this.fitRows(plane, noise, true);
    }
    this.addDelays(plane, noise, steepest);
    this.holdOutAll(plane, noise);
    const shaped = misfit(plane, 0, rows, noise);
    if (!this.bandpass.fitted || shaped.cost <= BAD * shaped.floor) return;
    // Several sources drifting against each other can pass for a shape of the band: try without one.
    this.keepShaped(plane);
    this.bandpass.flatten(columns);
    plane.held.set(plane.marks.subarray(0, rows * columns));
    this.fitRows(plane, noise);
    this.addDelays(plane, noise, steepest);
    if (misfit(plane, 0, rows, noise).cost > shaped.cost) this.restoreShaped(plane);
    else this.holdOutAll(plane, noise);
  }

  private fitRows(plane: Plane, noise: number, again = false): void {
    this.terms.fill(this.rows.tilted ? 2 : 1, 0, plane.rows);
    for (let row = 0; row < plane.rows; row++) this.rows.fit(plane, row, noise, again);
  }

  private addDelays(plane: Plane, noise: number, steepest: (row: number) => number): void {
    const { rows } = plane;
    this.delays.reset();
    for (const blockRows of BLOCKS) {
      if (blockRows > BLOCK_ROWS && blockRows >= 4 * rows) continue;
      let before: readonly number[] = [];
      for (let first = 0; first < rows; first += blockRows) {
        const last = Math.min(rows, first + blockRows);
        before = this.describeBlock(plane, noise, first, last, steepest, before);
      }
      if (blockRows === BLOCK_ROWS) this.lookBack(plane, noise, rows - 1);
    }
  }

  /** @param before slopes of the block before. @returns those of this one, if any */
  private describeBlock(
    plane: Plane,
    noise: number,
    first: number,
    last: number,
    steepest: (row: number) => number,
    before: readonly number[],
  ): readonly number[] {
    const base = this.rows.tilted ? 2 : 1;
    let slopes: readonly number[] = [];
    if (isBad(misfit(plane, first, last, noise))) {
      // Interference in some channels is no reason to look for sources; those show in all.
      const few = last - first <= BLOCK_ROWS && this.terms[first] === base;
      if (few && this.holdOut(plane, noise, first, last, true)) return slopes;
      const slope = Math.min(Math.PI, Math.max(steepest(first), steepest(last - 1)));
      slopes = this.delays.improve(plane, this.bandpass, first, last, noise, slope);
    }
    // A source that was there will not be gone at once, only too faint to be found by itself.
    if (slopes.length === 0 && before.length > 0) {
      slopes = this.delays.adopt(plane, this.bandpass, first, last, noise, before);
    }
    if (slopes.length === 0) return slopes;
    this.terms.fill(slopes.length, first, last);
    return slopes;
  }

  /** The same from the end to the beginning: a source may be found only once it has become bright. */
  private lookBack(plane: Plane, noise: number, lastRow: number): void {
    const base = this.rows.tilted ? 2 : 1;
    let after: readonly number[] = [];
    for (let first = lastRow - (lastRow % BLOCK_ROWS); first >= 0; first -= BLOCK_ROWS) {
      const last = Math.min(plane.rows, first + BLOCK_ROWS);
      if (this.terms[first]! > base) {
        after = this.delays.slopesOf(first);
        continue;
      }
      if (after.length > 0) after = this.delays.adopt(plane, this.bandpass, first, last, noise, after);
      if (after.length > 0) this.terms.fill(after.length, first, last);
    }
  }

  private holdOutAll(plane: Plane, noise: number): void {
    const base = this.rows.tilted ? 2 : 1;
    for (let first = 0; first < plane.rows; first += BLOCK_ROWS) {
      const last = Math.min(plane.rows, first + BLOCK_ROWS);
      if (this.terms[first]! === base) this.holdOut(plane, noise, first, last, false);
    }
  }

  /**
   * Channels that stand out of a block as a whole do not tell its amplitude: neither where they stick out, nor where by
   * chance they do not.
   *
   * @param enough only where the block is well described without them
   * @returns whether some were held out
   */
  private holdOut(plane: Plane, noise: number, first: number, last: number, enough: boolean): boolean {
    const { columns, held, power } = plane;
    const { counts } = this;
    counts.fill(0, 0, columns);
    for (let row = first; row < last; row++) {
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        if (held[i] === 0 && power[i]! > HELD_POWER * noise) counts[c]! += 1;
      }
    }
    const least = Math.max(Math.min(3, last - first), HELD_SHARE * (last - first));
    let out = 0;
    for (let c = 0; c < columns; c++) if (counts[c]! >= least) out += 1;
    const ends = counts[0]! >= least && counts[columns - 1]! >= least;
    if (out === 0 || out > MOST_HELD * columns || ends) return false;
    this.mark(plane, first, last, least, 0, OUT);
    if (enough && isBad(misfit(plane, first, last, noise))) {
      this.mark(plane, first, last, least, OUT, 0);
      return false;
    }
    for (let row = first; row < last; row++) this.rows.fit(plane, row, noise, true);
    return true;
  }

  /** In channels counted `least` times, turn one mark of `held` into another. */
  private mark(
    { columns, held }: Plane,
    first: number,
    last: number,
    least: number,
    from: number,
    to: number,
  ): void {
    for (let row = first; row < last; row++) {
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        if (this.counts[c]! >= least && held[i] === from) held[i] = to;
      }
    }
  }

  private keepShaped({ rows, columns, modelReal, modelImag, power }: Plane): void {
    const size = rows * columns;
    if (this.kept.power.length < size) {
      this.kept = {
        modelReal: new Float32Array(size),
        modelImag: new Float32Array(size),
        power: new Float32Array(size),
      };
    }
    this.kept.modelReal.set(modelReal.subarray(0, size));
    this.kept.modelImag.set(modelImag.subarray(0, size));
    this.kept.power.set(power.subarray(0, size));
    this.keptTerms.set(this.terms.subarray(0, rows));
    this.bandpass.keep(columns);
  }

  private restoreShaped({ rows, columns, modelReal, modelImag, power }: Plane): void {
    const size = rows * columns;
    modelReal.set(this.kept.modelReal.subarray(0, size));
    modelImag.set(this.kept.modelImag.subarray(0, size));
    power.set(this.kept.power.subarray(0, size));
    this.terms.set(this.keptTerms.subarray(0, rows));
    this.bandpass.restore(columns);
  }

  /** Power that a sample may have to count for the shape: none where most samples of the channel are off the model. */
  private fillLimits({ rows, columns, held, power }: Plane, noise: number): void {
    const { limits, counts } = this;
    counts.fill(0);
    for (let row = 0; row < rows; row++) {
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        if (held[i] === 0) counts[c]! += power[i]! > INLIER * noise ? -1 : 1;
      }
    }
    for (let c = 0; c < columns; c++) limits[c] = counts[c]! > 0 ? INLIER * noise : Number.POSITIVE_INFINITY;
  }

  /** The shape by least squares from all rows, without what sticks out. */
  private refineBandpass(plane: Plane, noise: number): void {
    const { rows, columns, real, imag, modelReal, modelImag, held, power } = plane;
    const { real: br, imag: bi, size } = this.bandpass;
    const { workReal, workImag, norms } = this;
    workReal.fill(0, 0, columns);
    workImag.fill(0, 0, columns);
    norms.fill(0, 0, columns);
    const limits = this.limits;
    this.fillLimits(plane, noise);
    for (let row = 0; row < rows; row++) {
      for (let c = 0, i = row * columns; c < columns; c++, i++) {
        if (held[i] !== 0 || power[i]! > limits[c]! || size[c]! === 0) continue;
        // The model over the shape is the row's amplitude m; V conj(m) sums to the shape times |m|^2.
        const mr = (modelReal[i]! * br[c]! + modelImag[i]! * bi[c]!) / size[c]!;
        const mi = (modelImag[i]! * br[c]! - modelReal[i]! * bi[c]!) / size[c]!;
        workReal[c]! += real[i]! * mr + imag[i]! * mi;
        workImag[c]! += imag[i]! * mr - real[i]! * mi;
        norms[c]! += mr * mr + mi * mi;
      }
    }
    for (let c = 0; c < columns; c++) {
      if (!(norms[c]! > 0)) continue;
      br[c] = workReal[c]! / norms[c]!;
      bi[c] = workImag[c]! / norms[c]!;
      size[c] = br[c]! * br[c]! + bi[c]! * bi[c]!;
    }
  }
}

/** Whether a block is described worse than noise would be. */
function isBad({ cost, floor }: { readonly cost: number; readonly floor: number }): boolean {
  return cost > floor + MISFIT * Math.sqrt(floor);
}
