/** Compiled twin of `count-sketches.ts`, which see. */

/** As in `count-sketches.ts`. */
const LINE: i32 = 32;
const PAGES_SHIFT: i32 = 6;
const NONE: i32 = 65535;
const FULL: i32 = 65535;

export function stageBuckets(bits: usize, samples: i32, to: usize, shift: i32): void {
  let from = bits;
  let out = to;
  for (let i = 0; i < samples; i += 8) {
    const a = i32x4.shr_s(v128.load(from), shift);
    const b = i32x4.shr_s(v128.load(from, 16), shift);
    // Buckets are below 2^15, so that nothing is cut but the high halves of minus one.
    v128.store(out, i16x8.narrow_i32x4_s(a, b));
    from += 32;
    out += 16;
  }
}

export function countSketches(
  gathered: usize,
  rows: i32,
  stride: i32,
  samples: i32,
  sketch: usize,
  directory: usize,
  counts: usize,
  pageShift: i32,
  pages: usize,
  capacity: i32,
  start: i32,
): i32 {
  const mask = (1 << pageShift) - 1;
  let s = start & (LINE - 1);
  const lineOfRow = start / LINE;
  let line = lineOfRow / rows;
  let row = lineOfRow % rows;
  const lines = (samples + LINE - 1) / LINE;
  for (; line < lines; line++) {
    const first = line * LINE;
    const end = min(LINE, samples - first);
    for (; row < rows; row++) {
      const from = gathered + ((<usize>(row * stride + first)) << 1);
      for (; s < end; s++) {
        const bucket = <i32>load<u16>(from + ((<usize>s) << 1));
        if (bucket === NONE) continue;
        const number = load<i32>(sketch + ((<usize>(first + s)) << 2));
        const slot = directory + ((<usize>((number << PAGES_SHIFT) + (bucket >> pageShift))) << 2);
        let page = load<i32>(slot);
        if (page === 0) {
          page = load<i32>(pages);
          if (page === capacity) return (line * rows + row) * LINE + s;
          store<i32>(pages, page + 1);
          store<i32>(slot, page);
          memory.fill(counts + ((<usize>page) << (pageShift + 1)), 0, (<usize>2) << pageShift);
        }
        const place = counts + ((<usize>((page << pageShift) | (bucket & mask))) << 1);
        const count = <i32>load<u16>(place);
        if (count === FULL) return (line * rows + row) * LINE + s;
        store<u16>(place, count + 1);
      }
      s = 0;
    }
    row = 0;
  }
  return -1;
}

/** Add 1 to each counter whose sample is not usable. */
export function countUnusable(bits: usize, samples: i32, counters: usize): void {
  let from = bits;
  let to = counters;
  let i = 0;
  for (; i + 4 <= samples; i += 4) {
    v128.store(to, i32x4.sub(v128.load(to), i32x4.shr_s(v128.load(from), 31)));
    from += 16;
    to += 16;
  }
  for (; i < samples; i++) {
    store<i32>(to, load<i32>(to) - (load<i32>(from) >> 31));
    from += 4;
    to += 4;
  }
}

/** For each kind that is not usable, 1 to K, add 1 to its counter of each sample of that kind. */
export function countKinds(bits: usize, samples: i32, kinds: i32, counters: usize): void {
  for (let kind = 1; kind <= kinds; kind++) {
    const wanted = i32x4.splat(-kind);
    let from = bits;
    let to = counters + ((<usize>((kind - 1) * samples)) << 2);
    let i = 0;
    for (; i + 4 <= samples; i += 4) {
      v128.store(to, i32x4.sub(v128.load(to), i32x4.eq(v128.load(from), wanted)));
      from += 16;
      to += 16;
    }
    for (; i < samples; i++) {
      if (load<i32>(from) === -kind) store<i32>(to, load<i32>(to) + 1);
      from += 4;
      to += 4;
    }
  }
}
