/** Selections compared: one inside another, two about the same samples, lists in one order. */
import { POLARIZATIONS } from "../dataset/dataset.ts";
import type { Selection } from "../dataset/selection.ts";
import { comparePairs, joinRanges } from "../rules/scope.ts";

/** The same selection with its lists ascending, without doubles, and its channel ranges joined. */
export function canonical(selection: Selection): Selection {
  const { antennas, baselines, time, subbands, channels, polarizations, fields } = selection;
  return {
    antennas: ascending(antennas),
    baselines: baselines === null ? null : uniquePairs(baselines),
    time: time === null ? null : [time[0], time[1]],
    subbands: ascending(subbands),
    channels: joinRanges(channels),
    polarizations:
      polarizations === null ? null : POLARIZATIONS.filter((name) => polarizations.includes(name)),
    fields: ascending(fields),
  };
}

function ascending(values: readonly number[] | null): number[] | null {
  return values === null ? null : [...new Set(values)].sort((a, b) => a - b);
}

/** The lower antenna first. */
function uniquePairs(pairs: readonly (readonly [number, number])[]): [number, number][] {
  const ordered = pairs.map(([a, b]): [number, number] => (a <= b ? [a, b] : [b, a])).sort(comparePairs);
  return ordered.filter((pair, i) => i === 0 || comparePairs(pair, ordered[i - 1]!) !== 0);
}

/** Every sample of `inner` is one of `outer`, as far as the parts alone tell. */
export function contains(outer: Selection, inner: Selection): boolean {
  return (
    antennasWithin(outer, inner) &&
    baselinesWithin(outer, inner) &&
    listWithin(outer.subbands, inner.subbands) &&
    listWithin(outer.polarizations, inner.polarizations) &&
    listWithin(outer.fields, inner.fields) &&
    rangesWithin(outer.channels, inner.channels) &&
    (outer.time === null ||
      (inner.time !== null && outer.time[0] <= inner.time[0] && inner.time[1] <= outer.time[1]))
  );
}

function antennasWithin(outer: Selection, inner: Selection): boolean {
  const { antennas } = outer;
  if (antennas === null) return true;
  if (inner.antennas?.every((antenna) => antennas.includes(antenna)) === true) return true;
  return inner.baselines?.every(([a, b]) => antennas.includes(a) || antennas.includes(b)) === true;
}

function baselinesWithin(outer: Selection, inner: Selection): boolean {
  const { baselines } = outer;
  if (baselines === null) return true;
  if (inner.baselines === null) return false;
  const known = new Set(baselines.map(pairKey));
  return inner.baselines.every((pair) => known.has(pairKey(pair)));
}

function pairKey([a, b]: readonly [number, number]): string {
  return a <= b ? `${a}-${b}` : `${b}-${a}`;
}

function listWithin<T>(outer: readonly T[] | null, inner: readonly T[] | null): boolean {
  return outer === null || (inner?.every((value) => outer.includes(value)) ?? false);
}

function rangesWithin(outer: Selection["channels"], inner: Selection["channels"]): boolean {
  if (outer === null) return true;
  const joined = joinRanges(outer)!;
  return inner?.every(([low, high]) => joined.some((range) => range[0] <= low && high <= range[1])) ?? false;
}

/**
 * Both are about the same thing: no part sets them apart. Antennas are told apart by who they are: a fault of antenna 3
 * and one of antenna 7 are not the same, though both touch the baseline 3-7.
 */
export function sameConcern(a: Selection, b: Selection): boolean {
  return (
    antennasMeet(a, b) &&
    listsMeet(a.subbands, b.subbands) &&
    listsMeet(a.polarizations, b.polarizations) &&
    listsMeet(a.fields, b.fields) &&
    (a.time === null || b.time === null || (a.time[0] <= b.time[1] && b.time[0] <= a.time[1])) &&
    (a.channels === null ||
      b.channels === null ||
      a.channels.some(([low, high]) => b.channels!.some((other) => low <= other[1] && other[0] <= high)))
  );
}

function listsMeet<T>(a: readonly T[] | null, b: readonly T[] | null): boolean {
  return a === null || b === null || a.some((value) => b.includes(value));
}

function antennasMeet(a: Selection, b: Selection): boolean {
  if (!listsMeet(a.antennas, b.antennas)) return false;
  if (a.baselines !== null && b.baselines !== null) {
    return pairsMeet(a.baselines, b.baselines);
  }
  return endsMeet(a.antennas, b.baselines) && endsMeet(b.antennas, a.baselines);
}

type Pairs = readonly (readonly [number, number])[];

function pairsMeet(a: Pairs, b: Pairs): boolean {
  // Tables of baselines are gone through pair by pair: no texts for two single ones.
  if (a.length === 1 && b.length === 1) return samePair(a[0]!, b[0]!);
  const known = new Set(b.map(pairKey));
  return a.some((pair) => known.has(pairKey(pair)));
}

function samePair([a, b]: readonly [number, number], [c, d]: readonly [number, number]): boolean {
  return (a === c && b === d) || (a === d && b === c);
}

function endsMeet(antennas: Selection["antennas"], baselines: Selection["baselines"]): boolean {
  if (antennas === null || baselines === null) return true;
  return baselines.some(([a, b]) => antennas.includes(a) || antennas.includes(b));
}

/** A text that two selections share when they are alike in every part but `except`. */
export function keyWithout(selection: Selection, except: keyof Selection | null): string {
  const { antennas, baselines, time, subbands, channels, polarizations, fields } = selection;
  const parts = { antennas, baselines, time, subbands, channels, polarizations, fields };
  return JSON.stringify(except === null ? parts : { ...parts, [except]: "*" });
}
