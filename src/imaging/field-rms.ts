/**
 * The rms over a square field of an image made of few visibilities, without making the image. A point at (u, v) cells
 * of 1/field, that holds the visibility e + i o, and its conjugate at (-u, -v) make the image
 * e cos(2 pi (u l + v m)) - o sin(2 pi (u l + v m)); the mean over the field of the product of two such waves is half of
 *   (e e' + o o') sinc(u - u') sinc(v - v') + (e e' - o o') sinc(u + u') sinc(v + v').
 * So samples closer than a cell add up and those further apart do not. The sincs are tapered to zero at some cells:
 * the field then has an edge that is soft by an eighth of its width, and the sum stays short.
 */

/** Cells at which the tapered sinc ends. */
const REACH = 4;
const STEPS = 512;
/** sinc(x) cos^2(pi x / (2 REACH)) by steps of 1/STEPS */
const TAPERED = taperedSinc();

/** Points of the uv plane, in cells of 1/field, anywhere in it. */
export interface FieldPoints {
  readonly count: number;
  /** (count) */
  readonly u: Float64Array;
  readonly v: Float64Array;
  /** (count) real and imaginary part of the visibility there */
  readonly even: Float64Array;
  readonly odd: Float64Array;
}

/** @returns the mean over the field of the square of the image sum of Re[(e + i o) exp(2 pi i (u l + v m))] */
export function meanSquareOverField(points: FieldPoints): number {
  const buckets = bucketsOf(points);
  const { u, v, even, odd, cells, first } = buckets;
  let sum = 0;
  for (let i = 0; i < cells.length; i++) {
    const { iu, iv } = cells[i]!;
    for (let du = 0; du <= REACH; du++) {
      for (let dv = du === 0 ? 0 : -REACH; dv <= REACH; dv++) {
        const j = buckets.find(iu + du, iv + dv);
        if (j < 0) continue;
        const pairs = near(i, j);
        sum += i === j ? pairs : 2 * pairs;
      }
    }
    // The conjugates of points near the origin are near it too.
    for (let su = iu; su <= REACH; su++) {
      for (let sv = -REACH; sv <= REACH; sv++) {
        const j = buckets.find(su - iu, sv - iv);
        if (j >= 0) sum += conjugates(i, j);
      }
    }
  }
  return Math.max(0, sum) / 2;

  function near(i: number, j: number): number {
    let pairs = 0;
    for (let a = first[i]!; a < first[i + 1]!; a++) {
      for (let b = first[j]!; b < first[j + 1]!; b++) {
        const both = even[a]! * even[b]! + odd[a]! * odd[b]!;
        pairs += both * tapered(u[a]! - u[b]!) * tapered(v[a]! - v[b]!);
      }
    }
    return pairs;
  }

  function conjugates(i: number, j: number): number {
    let pairs = 0;
    for (let a = first[i]!; a < first[i + 1]!; a++) {
      for (let b = first[j]!; b < first[j + 1]!; b++) {
        const both = even[a]! * even[b]! - odd[a]! * odd[b]!;
        pairs += both * tapered(u[a]! + u[b]!) * tapered(v[a]! + v[b]!);
      }
    }
    return pairs;
  }
}

interface Buckets extends FieldPoints {
  /** cells that hold points, in order of (iu, iv) */
  readonly cells: readonly { readonly iu: number; readonly iv: number }[];
  /** (cells + 1) first point of each */
  readonly first: Int32Array;
  /** place in `cells`, or -1 */
  find(iu: number, iv: number): number;
}

/** The points with u >= 0 (others are turned into their conjugates), sorted by cell. */
function bucketsOf(points: FieldPoints): Buckets {
  const { count } = points;
  const iu = new Int32Array(count);
  const iv = new Int32Array(count);
  const turn = new Int8Array(count);
  for (let i = 0; i < count; i++) {
    turn[i] = points.u[i]! < 0 ? -1 : 1;
    iu[i] = Math.round(turn[i]! * points.u[i]!);
    iv[i] = Math.round(turn[i]! * points.v[i]!);
  }
  const order = Array.from({ length: count }, (_, i) => i).sort(
    (a, b) => iu[a]! - iu[b]! || iv[a]! - iv[b]! || a - b,
  );
  const pick = (column: Float64Array, turned: boolean) =>
    Float64Array.from(order, (i) => (turned ? turn[i]! : 1) * column[i]!);
  const cells: { iu: number; iv: number }[] = [];
  const starts: number[] = [];
  const places = new Map<number, number>();
  order.forEach((i, at) => {
    const last = cells.at(-1);
    if (last?.iu === iu[i] && last?.iv === iv[i]) return;
    places.set(key(iu[i]!, iv[i]!), cells.length);
    cells.push({ iu: iu[i]!, iv: iv[i]! });
    starts.push(at);
  });
  return {
    count,
    u: pick(points.u, true),
    v: pick(points.v, true),
    even: pick(points.even, false),
    odd: pick(points.odd, true),
    cells,
    first: Int32Array.from([...starts, count]),
    find: (u, v) => places.get(key(u, v)) ?? -1,
  };
}

/** Distinct for cells up to 2^25 from the origin. */
function key(iu: number, iv: number): number {
  return iu * 2 ** 27 + iv + 2 ** 26;
}

function tapered(x: number): number {
  const at = Math.abs(x) * STEPS;
  if (at >= REACH * STEPS) return 0;
  const step = Math.floor(at);
  const low = TAPERED[step]!;
  return low + (at - step) * (TAPERED[step + 1]! - low);
}

function taperedSinc(): Float64Array {
  return Float64Array.from({ length: REACH * STEPS + 1 }, (_, step) => {
    const x = step / STEPS;
    const sinc = step === 0 ? 1 : Math.sin(Math.PI * x) / (Math.PI * x);
    return sinc * Math.cos((Math.PI * x) / (2 * REACH)) ** 2;
  });
}
