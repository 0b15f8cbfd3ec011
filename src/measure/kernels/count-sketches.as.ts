/** Compiled twin of `count-sketches.ts`, which see. */

/** As in `count-sketches.ts`. */
const LINE: i32 = 32;
const PAGES: i32 = 64;

/** Working space: bytes of the module's own, below all that is allocated. (32) int16 each. */
const LOW: usize = 2688;
const HIGH: usize = 2752;

export function stageBuckets(bits: usize, samples: i32, to: usize, shift: i32): void {
  let from = bits;
  let out = to;
  // Minus one, which is what is left of a negative number, becomes the last bucket.
  const last = i16x8.splat(<i16>(0x7fffffff >> shift));
  for (let i = 0; i < samples; i += 8) {
    const a = i32x4.shr_s(v128.load(from), shift);
    const b = i32x4.shr_s(v128.load(from, 16), shift);
    // Buckets are below 2^15, so that nothing is cut but the high halves of minus one.
    v128.store(out, v128.and(i16x8.narrow_i32x4_s(a, b), last));
    from += 32;
    out += 16;
  }
}

/** Shift from a bucket to its page, by the size of a type: a constant of each way the loops below are compiled. */
function shiftOf<T>(): i32 {
  return sizeof<T>() === 1 ? 6 : sizeof<T>() === 2 ? 7 : 8;
}

/** The lowest and the highest bucket of each sample of a line, over all rows; none where low is above high. */
function rangeOfLine(from: usize, rows: i32, strideBytes: usize, none: i32): void {
  const last = i16x8.splat(<i16>none);
  for (let k: usize = 0; k < 64; k += 16) {
    let low = last;
    let high = i16x8.splat(-1);
    let at = from + k;
    for (let row = 0; row < rows; row++) {
      const v = v128.load(at);
      low = i16x8.min_s(low, v);
      high = i16x8.max_s(high, v128.or(v, i16x8.eq(v, last)));
      at += strideBytes;
    }
    v128.store(LOW + k, low);
    v128.store(HIGH + k, high);
  }
}

/** Make the page of a bucket if there is none. @returns false where there is no more room */
function makePage<T>(bucket: i32, directory: usize, counts: usize, pages: usize, capacity: i32): bool {
  const shift = shiftOf<T>();
  const slot = bucket >> shift;
  const entry = directory + ((<usize>slot) << 2);
  if (load<i32>(entry) !== (PAGES - slot) << (shift + 1)) return true;
  const page = load<i32>(pages);
  if (page === capacity) return false;
  store<i32>(pages, page + 1);
  store<i32>(entry, (page + PAGES - slot) << (shift + 1));
  memory.fill(counts + ((<usize>(page + PAGES)) << (shift + 1)), 0, (<usize>2) << shift);
  return true;
}

/**
 * Make the pages that one sample's buckets fall into: those of the lowest and the highest, and where there are others
 * between them, those of all that are there.
 *
 * @returns false where there is no more room
 */
function makePages<T>(
  from: usize,
  rows: i32,
  strideBytes: usize,
  none: i32,
  low: i32,
  high: i32,
  directory: usize,
  counts: usize,
  pages: usize,
  capacity: i32,
): bool {
  if (!makePage<T>(low, directory, counts, pages, capacity)) return false;
  if (!makePage<T>(high, directory, counts, pages, capacity)) return false;
  if ((high >> shiftOf<T>()) - (low >> shiftOf<T>()) < 2) return true;
  let at = from;
  for (let row = 0; row < rows; row++) {
    const bucket = <i32>load<u16>(at);
    at += strideBytes;
    if (bucket !== none && !makePage<T>(bucket, directory, counts, pages, capacity)) return false;
  }
  return true;
}

/** Whether the pages of all buckets from `low` to `high` are there. */
function hasPages<T>(low: i32, high: i32, directory: usize): bool {
  const shift = shiftOf<T>();
  const last = high >> shift;
  for (let slot = low >> shift; slot <= last; slot++) {
    if (load<i32>(directory + ((<usize>slot) << 2)) === (PAGES - slot) << (shift + 1)) return false;
  }
  return true;
}

/** Count one line, of whose pages none is missing. */
function countLine<T>(
  from: usize,
  rows: i32,
  strideBytes: usize,
  n: usize,
  sketch: usize,
  directory: usize,
  counts: usize,
): void {
  const shift = shiftOf<T>();
  let row = from;
  for (let k = 0; k < rows; k++) {
    for (let s: usize = 0; s < n; s++) {
      const bucket = <usize>load<u16>(row + (s << 1));
      const entry = load<u32>(directory + load<u32>(sketch + (s << 2)) + ((bucket >> shift) << 2));
      const place = counts + <usize>entry + (bucket << 1);
      store<u16>(place, load<u16>(place) + 1);
    }
    row += strideBytes;
  }
}

/** The same where a sketch has numbers so large that they share a page with what is no number. */
function countNumbers<T>(
  from: usize,
  rows: i32,
  strideBytes: usize,
  n: usize,
  none: i32,
  sketch: usize,
  directory: usize,
  counts: usize,
): void {
  let row = from;
  for (let k = 0; k < rows; k++) {
    for (let s: usize = 0; s < n; s++) {
      const bucket = <usize>load<u16>(row + (s << 1));
      if (<i32>bucket === none) continue;
      const slot = (bucket >> shiftOf<T>()) << 2;
      const entry = load<u32>(directory + load<u32>(sketch + (s << 2)) + slot);
      const place = counts + <usize>entry + (bucket << 1);
      store<u16>(place, load<u16>(place) + 1);
    }
    row += strideBytes;
  }
}

function countLines<T>(
  gathered: usize,
  rows: i32,
  stride: i32,
  samples: i32,
  sketch: usize,
  directory: usize,
  counts: usize,
  pages: usize,
  capacity: i32,
  firstLine: i32,
  endLine: i32,
): i32 {
  const none = (256 << (shiftOf<T>() - 2)) - 1;
  const strideBytes = (<usize>stride) << 1;
  // Entries of the directory are ahead by as many pages as a sketch has slots.
  const base = counts - ((<usize>PAGES) << (shiftOf<T>() + 1));
  for (let line = firstLine; line < endLine; line++) {
    const first = line * LINE;
    const n = min(LINE, samples - first);
    const from = gathered + ((<usize>first) << 1);
    const map = sketch + ((<usize>first) << 2);
    rangeOfLine(from, rows, strideBytes, none);
    let hasLast = false;
    for (let s = 0; s < n; s++) {
      const own = directory + <usize>load<u32>(map + ((<usize>s) << 2));
      const low = <i32>load<i16>(LOW + ((<usize>s) << 1));
      const high = <i32>load<i16>(HIGH + ((<usize>s) << 1));
      // A sample without a number has none above its lowest.
      if (low <= high && !hasPages<T>(low, high, own)) {
        const at = from + ((<usize>s) << 1);
        if (!makePages<T>(at, rows, strideBytes, none, low, high, own, base, pages, capacity)) return line;
      }
      if (load<i32>(own, 4 * (PAGES - 1)) !== 1 << (shiftOf<T>() + 1)) hasLast = true;
    }
    if (hasLast) countNumbers<T>(from, rows, strideBytes, n, none, map, directory, base);
    else countLine<T>(from, rows, strideBytes, n, map, directory, base);
  }
  return endLine;
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
  firstLine: i32,
  endLine: i32,
): i32 {
  if (pageShift === 6) {
    return countLines<u8>(
      gathered,
      rows,
      stride,
      samples,
      sketch,
      directory,
      counts,
      pages,
      capacity,
      firstLine,
      endLine,
    );
  }
  if (pageShift === 7) {
    return countLines<u16>(
      gathered,
      rows,
      stride,
      samples,
      sketch,
      directory,
      counts,
      pages,
      capacity,
      firstLine,
      endLine,
    );
  }
  return countLines<u32>(
    gathered,
    rows,
    stride,
    samples,
    sketch,
    directory,
    counts,
    pages,
    capacity,
    firstLine,
    endLine,
  );
}

/** Numbers of a page. */
function countOfPage(page: usize, bytes: usize): u32 {
  let sum = i32x4.splat(0);
  for (let k: usize = 0; k < bytes; k += 16) {
    sum = i32x4.add(sum, i32x4.extadd_pairwise_i16x8_u(v128.load(page + k)));
  }
  return (
    i32x4.extract_lane(sum, 0) +
    i32x4.extract_lane(sum, 1) +
    i32x4.extract_lane(sum, 2) +
    i32x4.extract_lane(sum, 3)
  );
}

function pageAt(directory: usize, slot: i32, counts: usize, pageShift: i32): usize {
  const page = (load<i32>(directory + ((<usize>slot) << 2)) >> (pageShift + 1)) + slot - PAGES;
  return page === 0 ? 0 : counts + ((<usize>page) << (pageShift + 1));
}

export function findRank(directory: usize, counts: usize, pageShift: i32, share: f64, out: usize): i32 {
  const bytes = (<usize>2) << pageShift;
  let total: u32 = 0;
  for (let slot = 0; slot < PAGES; slot++) {
    const page = pageAt(directory, slot, counts, pageShift);
    if (page !== 0) total += countOfPage(page, bytes);
  }
  store<u32>(out, total);
  if (total === 0) return -1;
  const rank = <u32>floor(share * <f64>(total - 1));
  let below: u32 = 0;
  for (let slot = 0; slot < PAGES; slot++) {
    const page = pageAt(directory, slot, counts, pageShift);
    if (page === 0) continue;
    const all = countOfPage(page, bytes);
    if (below + all <= rank) {
      below += all;
      continue;
    }
    for (let k: usize = 0; k < bytes; k += 2) {
      const count = <u32>load<u16>(page + k);
      if (below + count > rank) {
        store<u32>(out, below, 4);
        store<u32>(out, count, 8);
        return (slot << pageShift) + <i32>(k >> 1);
      }
      below += count;
    }
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
