/**
 * Random numbers that depend on a seed and a key alone, so that every row of a dataset can be drawn without the
 * others: xoshiro128** streams, and normal deviates by the ziggurat.
 */

/**
 * A stream of 32-bit words: xoshiro128**.
 * @see Blackman & Vigna 2021, Scrambled linear pseudorandom number generators, ACM TOMS 47, 36
 */
export class Random {
  private s0 = 0;
  private s1 = 0;
  private s2 = 0;
  private s3 = 1;

  /** A stream of its own for every seed and list of whole numbers. */
  static of(seed: number, ...keys: readonly number[]): Random {
    const random = new Random();
    random.restart(seed, keys[0] ?? 0, keys[1] ?? 0, keys[2] ?? 0, keys[3] ?? 0);
    return random;
  }

  /** The generator in a state of its authors' notation, four 32-bit words not all zero. */
  static ofState(s0: number, s1: number, s2: number, s3: number): Random {
    const random = new Random();
    random.s0 = s0;
    random.s1 = s1;
    random.s2 = s2;
    random.s3 = s3;
    return random;
  }

  /** Begin the stream of this seed and these keys, as `of` does, without making an object. */
  restart(seed: number, a: number, b = 0, c = 0, d = 0): void {
    // Seeds above 32 bits keep their high word.
    let h = absorb(0x2545f491, seed | 0);
    h = absorb(h, Math.floor(seed / 0x100000000) | 0);
    h = absorb(absorb(h, a | 0), b | 0);
    h = absorb(absorb(h, c | 0), d | 0);
    this.s0 = mix(h + 0x9e3779b9);
    this.s1 = mix(this.s0 ^ (h + 0x3c6ef372));
    this.s2 = mix(this.s1 ^ (h - 0x255992d5));
    // The all-zero state is the one that never leaves itself.
    this.s3 = mix(this.s2 ^ (h + 0x78dde6e4)) | 1;
  }

  /** A 32-bit word, as a signed integer. */
  word(): number {
    const s1 = this.s1;
    const scrambled = Math.imul(rotate(Math.imul(s1, 5), 7), 9);
    const shifted = s1 << 9;
    this.s2 ^= this.s0;
    this.s3 ^= s1;
    this.s1 = s1 ^ this.s2;
    this.s0 ^= this.s3;
    this.s2 ^= shifted;
    this.s3 = rotate(this.s3, 11);
    return scrambled;
  }

  /** Uniform on 0 <= x < 1, 32 bits. */
  uniform(): number {
    return (this.word() >>> 0) * 2 ** -32;
  }

  /** Normal, mean 0, standard deviation 1. */
  normal(): number {
    for (;;) {
      const word = this.word();
      // Layer, sign and place inside the layer come from bits of their own (Doornik 2005), never shared.
      const layer = word & 255;
      const sign = (word & 256) === 0 ? 1 : -1;
      const x = (word >>> 9) * WIDTH[layer]!;
      if (word >>> 9 < INSIDE[layer]!) return sign * x;
      if (layer === 0) return sign * this.tail();
      const height = HEIGHT[layer - 1]! + this.uniform() * (HEIGHT[layer]! - HEIGHT[layer - 1]!);
      if (height < Math.exp(-0.5 * x * x)) return sign * x;
    }
  }

  /** Beyond the last layer (Marsaglia 1964). */
  private tail(): number {
    for (;;) {
      // 1 - u is never zero.
      const x = -Math.log(1 - this.uniform()) / TAIL_START;
      const y = -Math.log(1 - this.uniform());
      if (2 * y > x * x) return TAIL_START + x;
    }
  }

  /** Normal deviates of standard deviation 1 into `out[0..count)`. */
  fillNormals(out: Float64Array, count: number): void {
    for (let i = 0; i < count; i++) out[i] = this.normal();
  }
}

function rotate(word: number, bits: number): number {
  return (word << bits) | (word >>> (32 - bits));
}

/** Finalizer of MurmurHash3 (Appleby, public domain): every input bit moves half of the output bits. */
function mix(word: number): number {
  let h = word | 0;
  h = Math.imul(h ^ (h >>> 16), 0x85ebca6b);
  h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
  return h ^ (h >>> 16);
}

function absorb(hash: number, key: number): number {
  return mix(Math.imul(hash, 5) + mix(key + 0x7f4a7c15) + 0x165667b1);
}

/**
 * Ziggurat of 256 layers of equal area for exp(-x^2/2), x >= 0: Marsaglia & Tsang 2000, J. Stat. Software 5(8).
 * Its last layer, 0 here, starts the tail at 3.654; each has the area 0.00492867.
 */
const LAYERS = 256;
const TAIL_START = 3.6541528853610088;
const LAYER_AREA = 0.00492867323399;
const STEPS = 2 ** 23;
/** Width of a layer over the 2^23 places a word can name in it. */
const WIDTH = new Float64Array(LAYERS);
/** Places below this lie under the curve whatever their height. */
const INSIDE = new Float64Array(LAYERS);
const HEIGHT = new Float64Array(LAYERS);

function buildZiggurat(): void {
  const edge = new Float64Array(LAYERS + 1);
  edge[LAYERS - 1] = TAIL_START;
  for (let layer = LAYERS - 2; layer >= 1; layer--) {
    const above = edge[layer + 1]!;
    edge[layer] = Math.sqrt(-2 * Math.log(LAYER_AREA / above + Math.exp(-0.5 * above * above)));
  }
  edge[0] = 0;
  // Layer k spans x up to edge[k], and its top is the curve at edge[k - 1]: layer 1 is the cap.
  for (let layer = 1; layer < LAYERS; layer++) {
    WIDTH[layer] = edge[layer]! / STEPS;
    INSIDE[layer] = (edge[layer - 1]! / edge[layer]!) * STEPS;
  }
  // The base layer is the rectangle under the tail's start and the tail: a wider one of the same area.
  const base = LAYER_AREA / Math.exp(-0.5 * TAIL_START * TAIL_START);
  WIDTH[0] = base / STEPS;
  INSIDE[0] = (TAIL_START / base) * STEPS;
  for (let layer = 0; layer < LAYERS; layer++) HEIGHT[layer] = Math.exp(-0.5 * edge[layer]! * edge[layer]!);
}
buildZiggurat();
