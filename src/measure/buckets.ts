/**
 * Logarithmic buckets by the bits of a float32: the exponent and the leading bits of the mantissa of a power. Sixteen
 * buckets a factor of two in power, thirty-two in amplitude. A bucket's edges are in the ratio of at most 17/16, so that
 * the geometric middle is within a factor sqrt(17/16) of any power in it, and within `RELATIVE_ERROR` of any amplitude.
 * Adding counts merges sketches exactly, in any order, as in DDSketch (Masson, Rim & Lee 2019, PVLDB 12, 2195).
 */

const MANTISSA_BITS = 4;
/** Shift that leaves the exponent and the leading mantissa bits of a positive float32. */
export const BUCKET_SHIFT = 23 - MANTISSA_BITS;
const PER_OCTAVE = 1 << MANTISSA_BITS;

/** Octaves of power on either side of the scale: factors of 2^7 = 128 in amplitude. Beyond, the outermost bucket. */
const OCTAVES_EACH_WAY = 14;
export const BUCKETS = 2 * OCTAVES_EACH_WAY * PER_OCTAVE;

/** Largest relative error of an amplitude quantile inside the window: (17/16)^(1/4) - 1. */
export const RELATIVE_ERROR = 17 ** 0.25 / 2 - 1;

const scratch = new Float32Array(1);
const scratchBits = new Int32Array(scratch.buffer);

/** Bucket number, before the window is taken off, of a power >= 0. */
export function rawBucket(power: number): number {
  scratch[0] = power;
  return scratchBits[0]! >> BUCKET_SHIFT;
}

/** First raw bucket of the window about a typical power. */
export function windowStart(typicalPower: number): number {
  const middle = typicalPower > 0 && typicalPower < Number.POSITIVE_INFINITY ? typicalPower : 1;
  return Math.max(0, rawBucket(middle) - BUCKETS / 2);
}

/** Amplitude at the geometric middle of a bucket of the window. */
export function bucketAmplitude(start: number, bucket: number): number {
  scratchBits[0] = (start + bucket) << BUCKET_SHIFT;
  const low = scratch[0]!;
  scratchBits[0] = (start + bucket + 1) << BUCKET_SHIFT;
  // Square roots first: the product of two powers may leave the range of doubles' careful neighbours, float32.
  return Math.sqrt(Math.sqrt(low) * Math.sqrt(scratch[0]!));
}

/**
 * Amplitude below which the share `q` of the counts lies: the first bucket whose cumulative count exceeds q (n - 1).
 * Sketches are held side by side, bucket by bucket, because neighbouring channels fall into the same few buckets: so
 * their counts share cache lines.
 *
 * @param counts  (buckets x sketches)
 * @param sketch  which one
 * @param start   first raw bucket of the window
 * @param q       0..1
 * @returns NaN when the sketch is empty
 */
export function sketchQuantile(counts: Uint32Array, sketch: number, start: number, q: number): number {
  const sketches = counts.length / BUCKETS;
  let total = 0;
  for (let at = sketch; at < counts.length; at += sketches) total += counts[at]!;
  if (total === 0) return Number.NaN;
  const rank = q * (total - 1);
  let below = 0;
  for (let bucket = 0; bucket < BUCKETS; bucket++) {
    below += counts[bucket * sketches + sketch]!;
    if (below > rank) return bucketAmplitude(start, bucket);
  }
  throw new RangeError("a share above 1 was asked of a sketch");
}
