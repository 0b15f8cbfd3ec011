/** Compiled twin of `prepare.ts`, which see: the same arithmetic, four neighbouring samples at a time. */

/** As in `prepare.ts`. */
const GROUP: i32 = 16;
const SUMS: i32 = 8;
const KINDS: i32 = 5;
const FLAGGED: i32 = 1;
const BAD: i32 = 2;
const ZERO: i32 = 3;
const AUTOCORRELATION: i32 = -1;
const LEAST_WEIGHT: f32 = 9.094947017729282e-13;
const MOST_WEIGHT: f32 = 1099511627776.0;
const LEAST_POWER: f32 = 8.271806125530277e-25;
const MOST_POWER: f32 = 1.2089258196146292e24;

/** Sums kept in lanes: all but that of flagged weights are of float32. */
const LANE_SUMS: i32 = 8;
const LANE_BYTES: usize = 32;
/** Counts kept in lanes, behind the sums: flagged, bad, zero, weightless. */
const COUNTS_AT: usize = 256;

/** Working space: bytes of the module's own, below all that is allocated. (sums x 4) float64, (counts x 4) int32. */
const LANES: usize = 2048;

function clearLanes(): void {
  memory.fill(LANES, 0, COUNTS_AT + 4 * 16);
}

/** Add four float32 sums of a group to their float64 lanes. */
function addLanes(sum: i32, v: v128): void {
  const at = LANES + <usize>sum * LANE_BYTES;
  v128.store(at, f64x2.add(v128.load(at), f64x2.promote_low_f32x4(v)));
  const high = i32x4.shuffle(v, v, 2, 3, 2, 3);
  v128.store(at, f64x2.add(v128.load(at, 16), f64x2.promote_low_f32x4(high)), 16);
}

/** All lanes from `from` on. */
function lanesFrom(from: i32): v128 {
  return i32x4.ge_s(i32x4(0, 1, 2, 3), i32x4.splat(from));
}

/**
 * One sub-band whose samples are all usable and in range; bits and sums are nonsense where one is not.
 * @returns whether they were
 */
function wholeBand(real: usize, imag: usize, weight: usize, bits: usize, n: i32, polarizations: i32): bool {
  const back = (<usize>polarizations) << 2;
  const vectors = (n + 3) >> 2;
  const all = i32x4.splat(-1);
  const leastWeight = f32x4.splat(LEAST_WEIGHT);
  const mostWeight = f32x4.splat(MOST_WEIGHT);
  const leastPower = f32x4.splat(LEAST_POWER);
  const mostPower = f32x4.splat(MOST_POWER);
  let good = all;
  let hasBefore = lanesFrom(polarizations);
  let drop = i32x4.splat(0);
  let o: usize = 0;
  for (let k = 0; k < vectors; ) {
    const end = min(k + GROUP, vectors);
    let sr = f32x4.splat(0);
    let si = f32x4.splat(0);
    let sa = f32x4.splat(0);
    let sw = f32x4.splat(0);
    let sq = f32x4.splat(0);
    let tr = f32x4.splat(0);
    let ti = f32x4.splat(0);
    for (; k < end; k++) {
      if (k === vectors - 1 && (n & 3) !== 0) drop = lanesFrom(n & 3);
      const re = v128.andnot(v128.load(real + o), drop);
      const im = v128.andnot(v128.load(imag + o), drop);
      const w = v128.andnot(v128.load(weight + o), drop);
      const keep = v128.andnot(hasBefore, drop);
      const br = v128.and(v128.load(real + o - back), keep);
      const bi = v128.and(v128.load(imag + o - back), keep);
      hasBefore = all;
      const power = f32x4.add(f32x4.mul(re, re), f32x4.mul(im, im));
      const inRange = v128.and(
        v128.and(f32x4.ge(w, leastWeight), f32x4.le(w, mostWeight)),
        v128.and(f32x4.ge(power, leastPower), f32x4.le(power, mostPower)),
      );
      good = v128.and(good, v128.or(inRange, drop));
      const a = f32x4.sqrt(power);
      v128.store(bits + o, a);
      sr = f32x4.add(sr, f32x4.mul(w, re));
      si = f32x4.add(si, f32x4.mul(w, im));
      sa = f32x4.add(sa, a);
      sw = f32x4.add(sw, w);
      sq = f32x4.add(sq, f32x4.mul(w, w));
      tr = f32x4.add(tr, f32x4.add(f32x4.mul(re, br), f32x4.mul(im, bi)));
      ti = f32x4.add(ti, f32x4.sub(f32x4.mul(im, br), f32x4.mul(re, bi)));
      o += 16;
    }
    addLanes(0, sr);
    addLanes(1, si);
    addLanes(2, sa);
    addLanes(3, sw);
    addLanes(4, tr);
    addLanes(5, ti);
    addLanes(7, sq);
  }
  return i32x4.all_true(good);
}

/** Working space of the module: what stands before the first four samples, real and imaginary. */
const BEFORE: usize = 2432;

/**
 * What `wholeBand` does, of whole vectors alone: without a mask in its loop, and with the range asked at its end. Bits of
 * positive float32s are in the order of the numbers; those of negative ones and of no numbers are above them.
 */
function wholeVectors(
  real: usize,
  imag: usize,
  weight: usize,
  bits: usize,
  n: i32,
  polarizations: i32,
): bool {
  const back = (<usize>polarizations) << 2;
  const hasBefore = lanesFrom(polarizations);
  v128.store(BEFORE, v128.and(v128.load(real - back), hasBefore));
  v128.store(BEFORE, v128.and(v128.load(imag - back), hasBefore), 16);
  const end = (<usize>n) << 2;
  let leastWeight = i32x4.splat(-1);
  let mostWeight = i32x4.splat(0);
  let leastPower = i32x4.splat(-1);
  let mostPower = i32x4.splat(0);
  let beforeReal = BEFORE;
  let beforeImag = BEFORE + 16;
  let o: usize = 0;
  while (o < end) {
    const stop = min(o + ((<usize>GROUP) << 4), end);
    let sr = f32x4.splat(0);
    let si = f32x4.splat(0);
    let sa = f32x4.splat(0);
    let sw = f32x4.splat(0);
    let sq = f32x4.splat(0);
    let tr = f32x4.splat(0);
    let ti = f32x4.splat(0);
    do {
      const re = v128.load(real + o);
      const im = v128.load(imag + o);
      const power = f32x4.add(f32x4.mul(re, re), f32x4.mul(im, im));
      leastPower = i32x4.min_u(leastPower, power);
      mostPower = i32x4.max_u(mostPower, power);
      const a = f32x4.sqrt(power);
      v128.store(bits + o, a);
      sa = f32x4.add(sa, a);
      const br = v128.load(beforeReal);
      const bi = v128.load(beforeImag);
      tr = f32x4.add(tr, f32x4.add(f32x4.mul(re, br), f32x4.mul(im, bi)));
      ti = f32x4.add(ti, f32x4.sub(f32x4.mul(im, br), f32x4.mul(re, bi)));
      const w = v128.load(weight + o);
      leastWeight = i32x4.min_u(leastWeight, w);
      mostWeight = i32x4.max_u(mostWeight, w);
      sr = f32x4.add(sr, f32x4.mul(w, re));
      si = f32x4.add(si, f32x4.mul(w, im));
      sw = f32x4.add(sw, w);
      sq = f32x4.add(sq, f32x4.mul(w, w));
      o += 16;
      beforeReal = real + o - back;
      beforeImag = imag + o - back;
    } while (o < stop);
    addLanes(0, sr);
    addLanes(1, si);
    addLanes(2, sa);
    addLanes(3, sw);
    addLanes(4, tr);
    addLanes(5, ti);
    addLanes(7, sq);
  }
  const good = v128.and(
    v128.and(
      i32x4.ge_u(leastWeight, i32x4.splat(reinterpret<i32>(LEAST_WEIGHT))),
      i32x4.le_u(mostWeight, i32x4.splat(reinterpret<i32>(MOST_WEIGHT))),
    ),
    v128.and(
      i32x4.ge_u(leastPower, i32x4.splat(reinterpret<i32>(LEAST_POWER))),
      i32x4.le_u(mostPower, i32x4.splat(reinterpret<i32>(MOST_POWER))),
    ),
  );
  return i32x4.all_true(good);
}

function before(last: v128, now: v128, polarizations: i32): v128 {
  if (polarizations === 4) return last;
  if (polarizations === 2) return i32x4.shuffle(last, now, 2, 3, 4, 5);
  return i32x4.shuffle(last, now, 3, 4, 5, 6);
}

function addCount(which: i32, mask: v128): void {
  const at = LANES + COUNTS_AT + ((<usize>which) << 4);
  v128.store(at, i32x4.sub(v128.load(at), mask));
}

/**
 * One sub-band of any samples.
 * @returns false where one is usable and out of range: bits and sums are nonsense then
 */
function mixedBand(real: usize, imag: usize, weight: usize, bits: usize, n: i32, polarizations: i32): bool {
  const vectors = (n + 3) >> 2;
  const zero = f32x4.splat(0);
  const infinite = f32x4.splat(Infinity);
  let out = i32x4.splat(0);
  let drop = i32x4.splat(0);
  let lastRe = zero;
  let lastIm = zero;
  let o: usize = 0;
  for (let k = 0; k < vectors; ) {
    const end = min(k + GROUP, vectors);
    let sr = zero;
    let si = zero;
    let sa = zero;
    let sw = zero;
    let sq = zero;
    let tr = zero;
    let ti = zero;
    for (; k < end; k++) {
      if (k === vectors - 1 && (n & 3) !== 0) drop = lanesFrom(n & 3);
      const anyRe = v128.load(real + o);
      const anyIm = v128.load(imag + o);
      const anyW = v128.load(weight + o);
      const flagged = v128.andnot(
        v128.and(f32x4.le(anyW, zero), f32x4.gt(anyW, f32x4.splat(-Infinity))),
        drop,
      );
      const weighted = v128.andnot(v128.and(f32x4.gt(anyW, zero), f32x4.lt(anyW, infinite)), drop);
      const finite = v128.and(f32x4.lt(f32x4.abs(anyRe), infinite), f32x4.lt(f32x4.abs(anyIm), infinite));
      const nothing = v128.and(v128.and(f32x4.eq(anyRe, zero), f32x4.eq(anyIm, zero)), weighted);
      const usable = v128.andnot(v128.and(weighted, finite), nothing);
      const bad = v128.not(v128.or(v128.or(flagged, nothing), v128.or(usable, drop)));
      const re = v128.and(anyRe, usable);
      const im = v128.and(anyIm, usable);
      const w = v128.and(anyW, usable);
      const power = f32x4.add(f32x4.mul(re, re), f32x4.mul(im, im));
      const inRange = v128.and(
        v128.and(f32x4.ge(w, f32x4.splat(LEAST_WEIGHT)), f32x4.le(w, f32x4.splat(MOST_WEIGHT))),
        v128.and(f32x4.ge(power, f32x4.splat(LEAST_POWER)), f32x4.le(power, f32x4.splat(MOST_POWER))),
      );
      out = v128.or(out, v128.andnot(usable, inRange));
      const a = f32x4.sqrt(power);
      const kind = v128.or(
        v128.and(flagged, i32x4.splat(-FLAGGED)),
        v128.or(v128.and(bad, i32x4.splat(-BAD)), v128.and(nothing, i32x4.splat(-ZERO))),
      );
      v128.store(bits + o, v128.bitselect(a, kind, usable));
      const br = before(lastRe, re, polarizations);
      const bi = before(lastIm, im, polarizations);
      lastRe = re;
      lastIm = im;
      sr = f32x4.add(sr, f32x4.mul(w, re));
      si = f32x4.add(si, f32x4.mul(w, im));
      sa = f32x4.add(sa, a);
      sw = f32x4.add(sw, w);
      sq = f32x4.add(sq, f32x4.mul(w, w));
      tr = f32x4.add(tr, f32x4.add(f32x4.mul(re, br), f32x4.mul(im, bi)));
      ti = f32x4.add(ti, f32x4.sub(f32x4.mul(im, br), f32x4.mul(re, bi)));
      addCount(0, flagged);
      addCount(1, bad);
      addCount(2, nothing);
      addCount(3, v128.and(flagged, f32x4.eq(anyW, zero)));
      // Weights of flagged samples may be of any size: each is made float64.
      addLanes(6, v128.and(f32x4.neg(anyW), flagged));
      o += 16;
    }
    addLanes(0, sr);
    addLanes(1, si);
    addLanes(2, sa);
    addLanes(3, sw);
    addLanes(4, tr);
    addLanes(5, ti);
    addLanes(7, sq);
  }
  return !v128.any_true(out);
}

/** The lanes of each polarization joined, to the sums and counts of the sub-band's products. @returns usable samples */
function storeBand(sums: usize, counts: usize, channels: i32, polarizations: i32, sign: f64): i32 {
  let usable = 0;
  for (let p = 0; p < polarizations; p++) {
    for (let k = 0; k < LANE_SUMS; k++) {
      const at = LANES + <usize>k * LANE_BYTES + ((<usize>p) << 3);
      let sum: f64;
      if (polarizations === 4) sum = load<f64>(at);
      else if (polarizations === 2) sum = load<f64>(at) + load<f64>(at, 16);
      else sum = load<f64>(at) + load<f64>(at, 8) + (load<f64>(at, 16) + load<f64>(at, 24));
      const isImaginary = k === 1 || k === 5;
      store<f64>(sums + ((<usize>(p * SUMS + k)) << 3), isImaginary ? sign * sum : sum);
    }
    let others = 0;
    for (let k = 0; k < 4; k++) {
      let count = 0;
      for (let lane = p; lane < 4; lane += polarizations) {
        count += load<i32>(LANES + COUNTS_AT + ((<usize>(k * 4 + lane)) << 2));
      }
      store<i32>(counts + ((<usize>(p * KINDS + 1 + k)) << 2), count);
      if (k < 3) others += count;
    }
    store<i32>(counts + ((<usize>(p * KINDS)) << 2), channels - others);
    usable += channels - others;
  }
  return usable;
}

/** @returns whether all samples of the row are in range */
function prepareRow(
  subbands: i32,
  channels: i32,
  polarizations: i32,
  real: usize,
  imag: usize,
  weight: usize,
  bits: usize,
  sums: usize,
  counts: usize,
  sign: f64,
  whole: usize,
): bool {
  const n = channels * polarizations;
  let usable = 0;
  for (let s = 0; s < subbands; s++) {
    const o = (<usize>(s * n)) << 2;
    const product = <usize>(s * polarizations);
    clearLanes();
    const isWhole =
      (n & 3) === 0
        ? wholeVectors(real + o, imag + o, weight + o, bits + o, n, polarizations)
        : wholeBand(real + o, imag + o, weight + o, bits + o, n, polarizations);
    if (!isWhole) {
      clearLanes();
      if (!mixedBand(real + o, imag + o, weight + o, bits + o, n, polarizations)) return false;
    }
    usable += storeBand(
      sums + product * SUMS * 8,
      counts + product * KINDS * 4,
      channels,
      polarizations,
      sign,
    );
  }
  store<u8>(whole, usable === subbands * n ? 1 : 0);
  return true;
}

export function prepareRows(
  from: i32,
  rows: i32,
  subbands: i32,
  channels: i32,
  polarizations: i32,
  real: usize,
  imag: usize,
  weight: usize,
  baseline: usize,
  sign: usize,
  bits: usize,
  sums: usize,
  counts: usize,
  whole: usize,
): i32 {
  const rowBytes = (<usize>(subbands * channels * polarizations)) << 2;
  const products = <usize>(subbands * polarizations);
  for (let row = from; row < rows; row++) {
    const r = <usize>row;
    if (load<i32>(baseline + (r << 2)) === AUTOCORRELATION) continue;
    const o = r * rowBytes;
    const inRange = prepareRow(
      subbands,
      channels,
      polarizations,
      real + o,
      imag + o,
      weight + o,
      bits + o,
      sums + r * products * SUMS * 8,
      counts + r * products * KINDS * 4,
      <f64>load<i8>(sign + r),
      whole + r,
    );
    if (!inRange) return row;
  }
  return rows;
}
