/** Compiled twin of `differences.ts`, which see. */

/** Root of the squared modulus of a second difference of two samples, in float64. */
function modulus(rb: v128, rc: v128, ra: v128, ib: v128, ic: v128, ia: v128): v128 {
  const two = f64x2.splat(2);
  const re = f64x2.add(
    f64x2.sub(f64x2.promote_low_f32x4(rb), f64x2.mul(two, f64x2.promote_low_f32x4(rc))),
    f64x2.promote_low_f32x4(ra),
  );
  const im = f64x2.add(
    f64x2.sub(f64x2.promote_low_f32x4(ib), f64x2.mul(two, f64x2.promote_low_f32x4(ic))),
    f64x2.promote_low_f32x4(ia),
  );
  const root = f64x2.sqrt(f64x2.add(f64x2.mul(re, re), f64x2.mul(im, im)));
  return f32x4.demote_f64x2_zero(root);
}

function high(v: v128): v128 {
  return i32x4.shuffle(v, v, 2, 3, 2, 3);
}

export function fillDifferences(
  real: usize,
  imag: usize,
  bits: usize,
  subbands: i32,
  channels: i32,
  polarizations: i32,
  reach: i32,
  after: i32,
  out: usize,
): void {
  const none = i32x4.splat(-1);
  const down = (<usize>(reach * polarizations)) << 2;
  const up = (<usize>(after * polarizations)) << 2;
  const samples = subbands * channels * polarizations;
  for (let i = 0; i < samples; i += 4) v128.store(out + ((<usize>i) << 2), none);
  for (let s = 0; s < subbands; s++) {
    const first = (s * channels + reach) * polarizations;
    const end = (s * channels + channels - after) * polarizations;
    for (let i = first; i < end; i += 4) {
      const o = (<usize>i) << 2;
      const rb = v128.load(real + o - down);
      const rc = v128.load(real + o);
      const ra = v128.load(real + o + up);
      const ib = v128.load(imag + o - down);
      const ic = v128.load(imag + o);
      const ia = v128.load(imag + o + up);
      const kinds = v128.or(
        v128.or(v128.load(bits + o - down), v128.load(bits + o)),
        v128.load(bits + o + up),
      );
      const low = modulus(rb, rc, ra, ib, ic, ia);
      const top = modulus(high(rb), high(rc), high(ra), high(ib), high(ic), high(ia));
      const both = i32x4.shuffle(low, top, 0, 1, 4, 5);
      const usable = i32x4.ge_s(kinds, i32x4.splat(0));
      const inside = i32x4.lt_s(i32x4.add(i32x4.splat(i), i32x4(0, 1, 2, 3)), i32x4.splat(end));
      v128.store(out + o, v128.bitselect(both, none, v128.and(usable, inside)));
    }
  }
}
