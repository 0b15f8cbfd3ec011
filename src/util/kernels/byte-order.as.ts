/** Compiled twin of `byte-order.ts`, which see. */

/** Big-endian float32 as this machine's. */
function number(at: usize): i32 {
  return bswap<i32>(load<i32>(at));
}

export function splitTriples(
  from: usize,
  stride: usize,
  rows: i32,
  samples: i32,
  real: usize,
  imag: usize,
  weight: usize,
): void {
  let re = real;
  let im = imag;
  let we = weight;
  const vectors = samples >> 2;
  const rest = samples & 3;
  for (let row = 0; row < rows; row++) {
    let at = from + <usize>row * stride;
    for (let k = 0; k < vectors; k++) {
      // r0 i0 w0 r1 | i1 w1 r2 i2 | w2 r3 i3 w3: lanes are blended where they stand, then put in order and turned at once.
      const a = v128.load(at);
      const b = v128.load(at, 16);
      const c = v128.load(at, 32);
      const r = i32x4.shuffle(i32x4.shuffle(a, b, 0, 1, 6, 3), c, 0, 5, 2, 3);
      const i = i32x4.shuffle(i32x4.shuffle(b, a, 0, 5, 2, 3), c, 0, 1, 6, 3);
      const w = i32x4.shuffle(i32x4.shuffle(c, b, 0, 5, 2, 3), a, 0, 1, 6, 3);
      v128.store(re, i8x16.shuffle(r, r, 3, 2, 1, 0, 15, 14, 13, 12, 11, 10, 9, 8, 7, 6, 5, 4));
      v128.store(im, i8x16.shuffle(i, i, 7, 6, 5, 4, 3, 2, 1, 0, 15, 14, 13, 12, 11, 10, 9, 8));
      v128.store(we, i8x16.shuffle(w, w, 11, 10, 9, 8, 7, 6, 5, 4, 3, 2, 1, 0, 15, 14, 13, 12));
      at += 48;
      re += 16;
      im += 16;
      we += 16;
    }
    for (let k = 0; k < rest; k++) {
      store<i32>(re, number(at));
      store<i32>(im, number(at + 4));
      store<i32>(we, number(at + 8));
      at += 12;
      re += 4;
      im += 4;
      we += 4;
    }
  }
}

export function splitWeights(from: usize, stride: usize, rows: i32, samples: i32, weight: usize): void {
  let we = weight;
  const vectors = samples >> 2;
  const rest = samples & 3;
  for (let row = 0; row < rows; row++) {
    let at = from + <usize>row * stride;
    for (let k = 0; k < vectors; k++) {
      const a = v128.load(at);
      const b = v128.load(at, 16);
      const c = v128.load(at, 32);
      const w = i32x4.shuffle(i32x4.shuffle(c, b, 0, 5, 2, 3), a, 0, 1, 6, 3);
      v128.store(we, i8x16.shuffle(w, w, 11, 10, 9, 8, 7, 6, 5, 4, 3, 2, 1, 0, 15, 14, 13, 12));
      at += 48;
      we += 16;
    }
    for (let k = 0; k < rest; k++) {
      store<i32>(we, number(at + 8));
      at += 12;
      we += 4;
    }
  }
}

export function splitPairs(
  from: usize,
  stride: usize,
  rows: i32,
  samples: i32,
  real: usize,
  imag: usize,
): void {
  const vectors = samples >> 2;
  const rest = samples & 3;
  let re = real;
  let im = imag;
  for (let row = 0; row < rows; row++) {
    let at = from + <usize>row * stride;
    for (let k = 0; k < vectors; k++) {
      const a = v128.load(at);
      const b = v128.load(at, 16);
      v128.store(re, i8x16.shuffle(a, b, 3, 2, 1, 0, 11, 10, 9, 8, 19, 18, 17, 16, 27, 26, 25, 24));
      v128.store(im, i8x16.shuffle(a, b, 7, 6, 5, 4, 15, 14, 13, 12, 23, 22, 21, 20, 31, 30, 29, 28));
      at += 32;
      re += 16;
      im += 16;
    }
    for (let k = 0; k < rest; k++) {
      store<i32>(re, number(at));
      store<i32>(im, number(at + 4));
      at += 8;
      re += 4;
      im += 4;
    }
  }
}
