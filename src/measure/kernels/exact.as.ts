/** Compiled twin of `exact.ts`, which see. */

/** As in `exact.ts`. */
const WIDTH: i32 = 26;
const PIECES: i32 = 3;
const LOWEST: i32 = -42;
const EMPTY: i32 = -32768;

/** 2^(26 power), or the smallest float64 where that is less. */
function unit(power: i32): f64 {
  const exponent = max(-1074, power * WIDTH);
  const bits: u64 = exponent < -1022 ? (<u64>1) << (<u64>(exponent + 1074)) : (<u64>(exponent + 1023)) << 52;
  return reinterpret<f64>(bits);
}

/** Halves upward, as everywhere. */
function round(x: f64): f64 {
  const up = ceil(x);
  return up - 0.5 > x ? up - 1 : up;
}

function raise(top: usize, pieces: usize, power: i32): void {
  const was = <i32>load<i16>(top);
  const shift = was === EMPTY ? PIECES : min(PIECES, power - was);
  for (let k = PIECES - 1; k >= 0; k--) {
    const kept = k >= shift ? load<f64>(pieces + ((<usize>(k - shift)) << 3)) : 0;
    store<f64>(pieces + ((<usize>k) << 3), kept);
  }
  store<i16>(top, <i16>power);
}

function add(top: usize, pieces: usize, value: f64): void {
  if (value === 0) return;
  const exponent = (<i32>(reinterpret<u64>(value) >> 52) & 2047) - 1023;
  // Whole division cuts towards zero: from a multiple below all exponents it rounds down.
  let power = max(LOWEST + PIECES, (exponent + 40 * WIDTH) / WIDTH - 40);
  if (power > <i32>load<i16>(top)) raise(top, pieces, power);
  const highest = <i32>load<i16>(top);
  let rest = value;
  for (; power > highest - PIECES; power--) {
    const size = unit(power);
    const whole = round(rest / size) * size;
    const at = pieces + ((<usize>(highest - power)) << 3);
    store<f64>(at, load<f64>(at) + whole);
    rest -= whole;
    if (rest === 0) return;
  }
}

export function addExact(top: usize, pieces: usize, values: usize, step: i32, groups: i32, each: i32): void {
  let power = top;
  let piece = pieces;
  for (let g = 0; g < groups; g++) {
    const from = values + ((<usize>(g * step)) << 3);
    for (let k = 0; k < each; k++) {
      add(power, piece, load<f64>(from + ((<usize>k) << 3)));
      power += 2;
      piece += 8 * PIECES;
    }
  }
}
