/**
 * Measured u, v, w against those of a table, as sums from which every hypothesis about axes, signs and a turn about
 * the pole is judged without going through the samples again.
 */

/** One moment's baselines and what the file says of them; columns of one length. */
export interface Spacings {
  /** metres, as the file has them */
  readonly u: Float64Array;
  readonly v: Float64Array;
  readonly w: Float64Array;
  /** metres, position 1 less position 2 in the table's frame */
  readonly x: Float64Array;
  readonly y: Float64Array;
  readonly z: Float64Array;
  /** radians, of the frame's meridian */
  readonly hourAngle: Float64Array;
  /** +1, or -1 where the pair is taken the other way round */
  readonly sign: Int8Array;
}

/** What the file calls u, v, w, by axis: which expected axis it holds (0 u, 1 v, 2 w) and with which sign. */
export interface AxisMap {
  readonly axis: readonly [number, number, number];
  readonly sign: readonly [number, number, number];
}

export const SAME_AXES: AxisMap = { axis: [0, 1, 2], sign: [1, 1, 1] };

const ORDERS: readonly (readonly [number, number, number])[] = [
  [0, 1, 2],
  [1, 0, 2],
  [2, 1, 0],
  [0, 2, 1],
  [1, 2, 0],
  [2, 0, 1],
];

/** All 48 signed orders of the axes, the likeliest first. */
export const AXIS_MAPS: readonly AxisMap[] = ORDERS.flatMap((axis) =>
  [
    [1, 1, 1],
    [-1, -1, -1],
    [1, -1, 1],
    [-1, 1, 1],
    [1, 1, -1],
    [-1, 1, -1],
    [1, -1, -1],
    [-1, -1, 1],
  ].map((sign) => ({ axis, sign: sign as [number, number, number] })),
);

/** How well a hypothesis fits. */
export interface Fit {
  readonly map: AxisMap;
  /** radians about the pole */
  readonly turn: number;
  /** of the file's values over the expected */
  readonly scale: number;
  /** rms of the difference over the rms of the file's, at the best scale */
  readonly rms: number;
}

export class SpacingSums {
  /** (measured axis x [east, meridian, pole]) */
  private readonly products = new Float64Array(9);
  /** squares of each measured axis */
  private readonly measured = new Float64Array(3);
  private ee = 0;
  private mm = 0;
  private em = 0;
  private ep = 0;
  private mp = 0;
  private pp = 0;
  private readonly sinD: number;
  private readonly cosD: number;

  /** @param mirrored the table's y runs west */
  constructor(spacings: Spacings, declination: number, mirrored: boolean) {
    this.sinD = Math.sin(declination);
    this.cosD = Math.cos(declination);
    const { u, v, w, x, y, z, hourAngle, sign } = spacings;
    for (let i = 0; i < u.length; i++) {
      const s = sign[i]!;
      const yi = mirrored ? -y[i]! : y[i]!;
      const sine = Math.sin(hourAngle[i]!);
      const cosine = Math.cos(hourAngle[i]!);
      const east = sine * x[i]! + cosine * yi;
      const meridian = cosine * x[i]! - sine * yi;
      const pole = z[i]!;
      const values = [s * u[i]!, s * v[i]!, s * w[i]!];
      for (let k = 0; k < 3; k++) {
        const value = values[k]!;
        this.measured[k]! += value * value;
        this.products[k * 3]! += value * east;
        this.products[k * 3 + 1]! += value * meridian;
        this.products[k * 3 + 2]! += value * pole;
      }
      this.ee += east * east;
      this.mm += meridian * meridian;
      this.em += east * meridian;
      this.ep += east * pole;
      this.mp += meridian * pole;
      this.pp += pole * pole;
    }
  }

  /** rms of a measured axis over that of all three expected ones. */
  share(axis: number): number {
    return Math.sqrt(this.measured[axis]! / (this.ee + this.mm + this.pp));
  }

  /**
   * @param zero measured axes that hold nothing and are left out
   * @param turn radians about the pole, or null to find the best
   */
  fit(map: AxisMap, zero: readonly boolean[], turn: number | null): Fit {
    let [cos, sin, constant] = [0, 0, 0];
    for (let k = 0; k < 3; k++) {
      if (zero[k]) continue;
      const [c, s, fixed] = this.wave(k, map.axis[k]!);
      cos += map.sign[k]! * c;
      sin += map.sign[k]! * s;
      constant += map.sign[k]! * fixed;
    }
    const at = (angle: number): Fit => {
      const product = cos * Math.cos(angle) + sin * Math.sin(angle) + constant;
      let expected = this.ee + this.mm + this.pp;
      let measured = 0;
      for (let k = 0; k < 3; k++) {
        if (zero[k]) expected -= this.square(map.axis[k]!, angle);
        else measured += this.measured[k]!;
      }
      const rest = 1 - (product * Math.abs(product)) / (expected * measured);
      return { map, turn: angle, scale: product / expected, rms: Math.sqrt(Math.max(0, rest)) };
    };
    if (turn !== null) return at(turn);
    const best = Math.atan2(sin, cos);
    // With an axis missing, what is expected on the others changes with the turn.
    return zero.some((isZero) => isZero) ? smallestRms(at, best - 0.3, best + 0.3) : at(best);
  }

  /** Sum of a measured axis times an expected one, as cosine, sine and constant of the turn. */
  private wave(measured: number, expected: number): [number, number, number] {
    const { products, sinD, cosD } = this;
    const [e, m, p] = [products[measured * 3]!, products[measured * 3 + 1]!, products[measured * 3 + 2]!];
    if (expected === 0) return [e, m, 0];
    return expected === 1 ? [-sinD * m, sinD * e, cosD * p] : [cosD * m, -cosD * e, sinD * p];
  }

  /** Sum of squares of an expected axis at a turn. */
  private square(axis: number, turn: number): number {
    const { ee, mm, em, ep, mp, pp, sinD, cosD } = this;
    const c = Math.cos(turn);
    const s = Math.sin(turn);
    if (axis === 0) return c * c * ee + 2 * c * s * em + s * s * mm;
    const meridian = c * c * mm - 2 * c * s * em + s * s * ee;
    const cross = c * mp - s * ep;
    return axis === 1
      ? sinD * sinD * meridian - 2 * sinD * cosD * cross + cosD * cosD * pp
      : cosD * cosD * meridian + 2 * sinD * cosD * cross + sinD * sinD * pp;
  }
}

/** Golden-section search for the turn of the smallest rms. */
function smallestRms(at: (turn: number) => Fit, from: number, to: number): Fit {
  const golden = (Math.sqrt(5) - 1) / 2;
  let [low, high] = [from, to];
  for (let step = 0; step < 45; step++) {
    const left = high - golden * (high - low);
    const right = low + golden * (high - low);
    if (at(left).rms < at(right).rms) high = right;
    else low = left;
  }
  return at((low + high) / 2);
}
