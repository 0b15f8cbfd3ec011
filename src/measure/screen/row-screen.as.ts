/**
 * Compiled twin of `row-screen.ts`, which see. Four samples at a time, whatever their polarizations: lane l of a vector that begins k samples after a sub-band's second channel is of
 * polarization (k + l) mod polarizations, and k is a multiple of 4, so that 1, 2 or 4 polarizations have lanes of their own.
 */

/** As in `row-screen.ts`. */
const AT_LEVEL: i32 = 96;
const HIGHEST: i32 = 255;
const HIGH: i32 = 187;
const BRIGHT: i32 = 247;
const SHIFT: i32 = 18;

function lanes(from: i32, count: i32): v128 {
  return i32x4.lt_s(i32x4.add(i32x4.splat(from), i32x4(0, 1, 2, 3)), i32x4.splat(count));
}

function laneSum(v: v128, polarization: i32, polarizations: i32): i32 {
  let sum = 0;
  for (let l = polarization; l < 4; l += polarizations) sum += at(v, l);
  return sum;
}

function at(v: v128, lane: i32): i32 {
  return lane === 0
    ? i32x4.extract_lane(v, 0)
    : lane === 1
      ? i32x4.extract_lane(v, 1)
      : lane === 2
        ? i32x4.extract_lane(v, 2)
        : i32x4.extract_lane(v, 3);
}

/** Steps of the samples of one sub-band of a row; their sums and counts to `out`. @returns how many are missing */
function fillSteps(
  real: usize,
  imag: usize,
  bits: usize,
  to: usize,
  n: i32,
  polarizations: i32,
  out: usize,
  products: i32,
): i32 {
  const before = (<usize>polarizations) << 2;
  let sum = i32x4.splat(0);
  let count = i32x4.splat(0);
  const none = i32x4.splat(-1);
  const zero = i32x4.splat(0);
  const top = i32x4.splat(255 << 5);
  for (let k = 0; k < n; k += 4) {
    const o = (<usize>k) << 2;
    const rb = v128.load(real + o);
    const rc = v128.load(real + o + before);
    const ra = v128.load(real + o + 2 * before);
    const ib = v128.load(imag + o);
    const ic = v128.load(imag + o + before);
    const ia = v128.load(imag + o + 2 * before);
    const re = f32x4.sub(f32x4.add(rb, ra), f32x4.add(rc, rc));
    const im = f32x4.sub(f32x4.add(ib, ia), f32x4.add(ic, ic));
    const power = f32x4.add(f32x4.mul(re, re), f32x4.mul(im, im));
    const step = i32x4.shr_s(power, SHIFT);
    const any = v128.or(
      v128.or(v128.load(bits + o), v128.load(bits + o + before)),
      v128.load(bits + o + 2 * before),
    );
    let good = v128.and(i32x4.gt_s(step, zero), i32x4.lt_s(step, top));
    good = v128.and(good, i32x4.gt_s(any, none));
    good = v128.and(good, lanes(k, n));
    sum = i32x4.add(sum, v128.and(step, good));
    count = i32x4.sub(count, good);
    v128.store(to + o, v128.bitselect(step, none, good));
  }
  let known = 0;
  for (let p = 0; p < polarizations; p++) {
    const c = laneSum(count, p, polarizations);
    known += c;
    store<i32>(out + ((<usize>p) << 2), laneSum(sum, p, polarizations));
    store<i32>(out + ((<usize>(products + p)) << 2), c);
  }
  return n - known;
}

function addSteps(
  from: usize,
  to: usize,
  tally: usize,
  n: i32,
  polarizations: i32,
  missing: bool,
  out: usize,
  products: i32,
): void {
  let shift = i32x4.splat(AT_LEVEL - load<i32>(out));
  if (polarizations === 2) {
    const b = AT_LEVEL - load<i32>(out, 4);
    shift = i32x4.replace_lane(i32x4.replace_lane(shift, 1, b), 3, b);
  } else if (polarizations === 4) {
    shift = i32x4.sub(i32x4.splat(AT_LEVEL), v128.load(out));
  }
  const zero = i32x4.splat(0);
  const highest = i32x4.splat(HIGHEST);
  const limit = i32x4.splat(HIGH);
  const most = i32x4.splat(BRIGHT);
  let bright = zero;
  let high = zero;
  for (let k = 0; k < n; k += 4) {
    const o = (<usize>k) << 2;
    const step = v128.load(from + o);
    let x = i32x4.max_s(zero, i32x4.min_s(highest, i32x4.add(step, shift)));
    if (missing || k + 4 > n) {
      const good = v128.and(i32x4.ge_s(step, zero), lanes(k, n));
      x = v128.and(x, good);
      if (missing) v128.store(tally + o, i32x4.sub(v128.load(tally + o), good));
    }
    v128.store(to + o, i32x4.add(v128.load(to + o), x));
    bright = i32x4.sub(bright, i32x4.gt_s(x, most));
    high = i32x4.sub(high, i32x4.gt_s(x, limit));
  }
  for (let p = 0; p < polarizations; p++) {
    store<i32>(out + ((<usize>(2 * products + p)) << 2), laneSum(bright, p, polarizations));
    store<i32>(out + ((<usize>(3 * products + p)) << 2), laneSum(high, p, polarizations));
  }
}

function settle(out: usize, subbands: i32, polarizations: i32, together: bool): void {
  const products = subbands * polarizations;
  for (let p = 0; p < polarizations; p++) {
    let sum = 0;
    let n = 0;
    for (let s = 0; s < subbands; s++) {
      const place = out + ((<usize>(s * polarizations + p)) << 2);
      sum += load<i32>(place);
      n += load<i32>(place + ((<usize>products) << 2));
      if (together) continue;
      store<i32>(place, n === 0 ? 0 : sum / n);
      sum = 0;
      n = 0;
    }
    if (!together) continue;
    const mean = n === 0 ? 0 : sum / n;
    for (let s = 0; s < subbands; s++) store<i32>(out + ((<usize>(s * polarizations + p)) << 2), mean);
  }
}

/**
 * Rows one after the other; 16 bytes of room behind each array.
 *
 * @param out (rows x 4 x products) level, count, bright, high of each row
 * @returns rows that were whole
 */
export function screenRows(
  rows: i32,
  subbands: i32,
  channels: i32,
  polarizations: i32,
  together: bool,
  real: usize,
  imag: usize,
  bits: usize,
  scratch: usize,
  sums: usize,
  counts: usize,
  out: usize,
): i32 {
  const products = subbands * polarizations;
  const n = (channels - 2) * polarizations;
  const first = (<usize>polarizations) << 2;
  const band = (<usize>(channels * polarizations)) << 2;
  const stride = <usize>subbands * band;
  let whole = 0;
  for (let row = 0; row < rows; row++) {
    const at = <usize>row * stride;
    const left = out + ((<usize>(row * 4 * products)) << 2);
    let missing = 0;
    for (let s = 0; s < subbands; s++) {
      const o = <usize>s * band;
      const own = left + ((<usize>(s * polarizations)) << 2);
      const to = scratch + o + first;
      missing += fillSteps(real + at + o, imag + at + o, bits + at + o, to, n, polarizations, own, products);
    }
    settle(left, subbands, polarizations, together);
    if (missing === 0) whole += 1;
    for (let s = 0; s < subbands; s++) {
      const o = <usize>s * band + first;
      const own = left + ((<usize>(s * polarizations)) << 2);
      addSteps(scratch + o, sums + o, counts + o, n, polarizations, missing > 0, own, products);
    }
  }
  return whole;
}
