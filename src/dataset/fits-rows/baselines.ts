/**
 * BASELINE codes: 256 a1 + a2, or 2048 a1 + a2 + 65536 where a number exceeds 255, each with 0.01 (subarray - 1) on top.
 * By the visibility convention (Greisen 2016, recalled).
 */

export interface BaselineCode {
  antenna1: number;
  antenna2: number;
  subarray: number;
}

/** Larger than any 2048-based code. */
const LEAST_IMPOSSIBLE = 65536 + 2048 * 2048;

/**
 * Decode into `out`; false where `code` is no code (not finite, negative, too large), and `out` is as it was.
 * In float32 a code above 65536 keeps its subarray fraction only to 1/128.
 */
export function decodeBaseline(code: number, out: BaselineCode): boolean {
  if (!(code > -0.005 && code < LEAST_IMPOSSIBLE)) return false;
  const whole = Math.floor(code + 1e-4);
  out.subarray = Math.round(100 * (code - whole)) + 1;
  if (whole > 65536) {
    out.antenna1 = (whole - 65536) >> 11;
    out.antenna2 = (whole - 65536) & 2047;
  } else {
    out.antenna1 = whole >> 8;
    out.antenna2 = whole & 255;
  }
  return true;
}
