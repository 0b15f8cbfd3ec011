/**
 * Interference that comes at the same hour: of the nights that observed a stretch of frequency at some hour, more had it
 * than its share of all other hours makes likely.
 */

/** A stretch of time of one night, MJD (UTC). */
export interface Stretch {
  readonly night: string;
  readonly start: number;
  readonly end: number;
}

export interface Recurrence {
  /** "utc": the hour of the day; "sidereal": that of the sky */
  readonly clock: "utc" | "sidereal";
  /** hours, 0..24; `to` is below `from` where it goes past midnight */
  readonly from: number;
  readonly to: number;
  /** nights that had it, of those that observed then */
  readonly nights: number;
  readonly observed: number;
  /** that so many had it by chance */
  readonly chance: number;
}

const BINS = 48;
const HOURS = 24;
/** Sidereal days in a day. */
const SIDEREAL_RATE = 1.002737909350795;
/** A recurrence has at least so many nights, and this share of those that observed. */
const LEAST_NIGHTS = 4;
const LEAST_SHARE = 0.6;
/** A chance of this in all hours of both clocks together is none: one false recurrence in so many stretches of frequency. */
const LEAST_CHANCE = 1e-4;

/**
 * @param seen    when it was there
 * @param watched when anything was observed at these frequencies
 * @returns the clearest of both clocks; null where nothing recurs
 */
export function recurrenceOf(seen: readonly Stretch[], watched: readonly Stretch[]): Recurrence | null {
  const found = (["utc", "sidereal"] as const).flatMap((clock) => onClock(clock, seen, watched) ?? []);
  return found.sort((a, b) => a.chance - b.chance)[0] ?? null;
}

function onClock(
  clock: Recurrence["clock"],
  seen: readonly Stretch[],
  watched: readonly Stretch[],
): Recurrence | null {
  const had = nightsByBin(clock, seen);
  const observed = nightsByBin(clock, watched);
  const counts = had.map((nights, bin) => [...nights].filter((night) => observed[bin]!.has(night)).length);
  const recurs = counts.map((count, bin) => {
    const of = observed[bin]!.size;
    if (count < LEAST_NIGHTS || count < LEAST_SHARE * of) return null;
    const chance = binomialTail(of, count, shareElsewhere(counts, observed, bin)) * 2 * BINS;
    return chance < LEAST_CHANCE ? { count, of, chance } : null;
  });
  const best = recurs.reduce<number>(
    (at, bin, i) => (bin !== null && (at < 0 || bin.chance < recurs[at]!.chance) ? i : at),
    -1,
  );
  if (best < 0) return null;
  let [first, last] = [best, best];
  while (last - first < BINS - 1 && recurs[(first - 1 + BINS) % BINS] !== null) first -= 1;
  while (last - first < BINS - 1 && recurs[(last + 1) % BINS] !== null) last += 1;
  // All hours that were observed: it is there all the time, which is no hour.
  if (observed.every((nights, bin) => nights.size < LEAST_NIGHTS || recurs[bin] !== null)) return null;
  const hour = (bin: number) => (((bin + BINS) % BINS) * HOURS) / BINS;
  const { count, of, chance } = recurs[best]!;
  return { clock, from: hour(first), to: hour(last + 1), nights: count, observed: of, chance };
}

function nightsByBin(clock: Recurrence["clock"], stretches: readonly Stretch[]): Set<string>[] {
  const nights = Array.from({ length: BINS }, () => new Set<string>());
  for (const { night, start, end } of stretches) {
    const scale = clock === "utc" ? 1 : SIDEREAL_RATE;
    const [first, last] = [Math.floor(start * scale * BINS), Math.floor(end * scale * BINS)];
    for (let bin = first; bin <= last && bin < first + BINS; bin++) {
      nights[((bin % BINS) + BINS) % BINS]!.add(night);
    }
  }
  return nights;
}

/** How often it is there at hours away from a bin and its neighbours, never quite 0. */
function shareElsewhere(counts: readonly number[], observed: readonly Set<string>[], bin: number): number {
  let [had, of] = [0, 0];
  counts.forEach((count, other) => {
    const apart = Math.min(Math.abs(other - bin), BINS - Math.abs(other - bin));
    if (apart <= 4) return;
    had += count;
    of += observed[other]!.size;
  });
  return (had + 0.5) / (of + 1);
}

/** P(at least `count` of `of`), each with chance p. */
function binomialTail(of: number, count: number, p: number): number {
  let term = (1 - p) ** of;
  let sum = count === 0 ? term : 0;
  for (let k = 1; k <= of; k++) {
    term *= ((of - k + 1) / k) * (p / (1 - p));
    if (k >= count) sum += term;
  }
  return Math.min(1, sum);
}
