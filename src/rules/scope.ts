/** Whom a row of a measure is about, as a selection; and selections in words. */
import type { Polarization } from "../dataset/dataset.ts";
import { POLARIZATIONS } from "../dataset/dataset.ts";
import { EVERYTHING, type Selection } from "../dataset/selection.ts";
import type { Measure, Measures } from "../measure/table.ts";
import { isoFromMjd } from "../util/dates.ts";
import { plainText } from "../util/terminal.ts";
import type { Finding } from "./finding.ts";

/** The scope of each row, by the column names that are understood everywhere (see Measure). */
export function rowScopes(measure: Measure): (row: number) => Selection {
  const { scopes } = measure;
  if (scopes !== undefined) return (row) => scopes[row] ?? EVERYTHING;
  const names = new Set(measure.table.columnNames());
  const column = (name: string): ((row: number) => unknown) =>
    names.has(name) ? (row) => measure.table.get(name, row) : () => null;
  const whole = (name: string) => {
    const read = column(name);
    return (row: number): number | null => {
      const value = read(row);
      return typeof value === "number" && Number.isInteger(value) ? value : null;
    };
  };
  const antenna = whole("antenna");
  const antenna1 = whole("antenna1");
  const antenna2 = whole("antenna2");
  const subband = whole("subband");
  const low = whole(names.has("channel") ? "channel" : "channel_lo");
  const high = whole(names.has("channel") ? "channel" : "channel_hi");
  const field = whole("field");
  const polarization = column("polarization");
  const start = column("time_start");
  const end = column("time_end");
  return (row) => ({
    ...EVERYTHING,
    antennas: list(antenna(row)),
    baselines: pair(antenna1(row), antenna2(row)),
    subbands: list(subband(row)),
    channels: pair(low(row), high(row)),
    fields: list(field(row)),
    polarizations: polarizationsOf(polarization(row)),
    time: range(start(row), end(row)),
  });
}

function list(value: number | null): number[] | null {
  return value === null ? null : [value];
}

function pair(a: number | null, b: number | null): [number, number][] | null {
  return a === null || b === null ? null : [[a, b]];
}

function range(a: unknown, b: unknown): [number, number] | null {
  return typeof a === "number" && typeof b === "number" && a <= b ? [a, b] : null;
}

function polarizationsOf(value: unknown): Polarization[] | null {
  if (typeof value !== "string") return null;
  const words = value.split(" ");
  const found = POLARIZATIONS.filter((name) => words.includes(name));
  return found.length === 0 ? null : found;
}

/** A selection that holds all of the given ones: part by part, so it may hold more. */
export function unionScope(scopes: readonly Selection[]): Selection {
  return {
    antennas: unionOf(
      scopes.map((scope) => scope.antennas),
      String,
      (a, b) => a - b,
    ),
    baselines: unionOf(
      scopes.map((scope) => scope.baselines),
      String,
      comparePairs,
    ),
    subbands: unionOf(
      scopes.map((scope) => scope.subbands),
      String,
      (a, b) => a - b,
    ),
    channels: joinRanges(
      unionOf(
        scopes.map((scope) => scope.channels),
        String,
        comparePairs,
      ),
    ),
    polarizations: unionOf(
      scopes.map((scope) => scope.polarizations),
      String,
      byStokesOrder,
    ),
    fields: unionOf(
      scopes.map((scope) => scope.fields),
      String,
      (a, b) => a - b,
    ),
    time: timeSpan(scopes.map((scope) => scope.time)),
  };
}

function unionOf<T>(
  parts: readonly (readonly T[] | null)[],
  key: (value: T) => string,
  compare: (a: T, b: T) => number,
): T[] | null {
  const found = new Map<string, T>();
  for (const part of parts) {
    if (part === null) return null;
    for (const value of part) found.set(key(value), value);
  }
  return [...found.values()].sort(compare);
}

function timeSpan(times: readonly (readonly [number, number] | null)[]): [number, number] | null {
  let start = Number.POSITIVE_INFINITY;
  let end = Number.NEGATIVE_INFINITY;
  for (const time of times) {
    if (time === null) return null;
    start = Math.min(start, time[0]);
    end = Math.max(end, time[1]);
  }
  return start <= end ? [start, end] : null;
}

/** Ascending ranges with those that touch or overlap made one. */
export function joinRanges(ranges: readonly (readonly [number, number])[] | null): [number, number][] | null {
  if (ranges === null) return null;
  const joined: [number, number][] = [];
  for (const [low, high] of [...ranges].sort(comparePairs)) {
    const last = joined.at(-1);
    if (last !== undefined && low <= last[1] + 1) last[1] = Math.max(last[1], high);
    else joined.push([low, high]);
  }
  return joined;
}

export function comparePairs(a: readonly [number, number], b: readonly [number, number]): number {
  return a[0] - b[0] || a[1] - b[1];
}

function byStokesOrder(a: Polarization, b: Polarization): number {
  return POLARIZATIONS.indexOf(a) - POLARIZATIONS.indexOf(b);
}

/** The parts of a selection that narrow it, as a finding holds them. */
export function findingScope(scope: Selection): Finding["scope"] {
  return Object.fromEntries(Object.entries(scope).filter(([, part]) => part !== null));
}

/** Most members that a list in a sentence names one by one. */
const MOST_NAMED = 6;

/** How an antenna is called: by number without a label. */
export type AntennaLabel = (antenna: number) => string;

/**
 * An antenna's name where it is the only one of that name, else with its number; the number where it has none. Names are
 * a file's: stripped of what cannot be seen.
 */
export function antennaLabels(
  antennas: Iterable<{ readonly number: number; readonly name: string | null }>,
): AntennaLabel {
  const plain = [...antennas].map(({ number, name }) => ({ number, name: plainText(name ?? "").trim() }));
  const uses = new Map<string, number>();
  for (const { name } of plain) uses.set(name, (uses.get(name) ?? 0) + 1);
  const labels = new Map(
    plain
      .filter(({ name }) => name !== "")
      .map(({ number, name }) => [number, uses.get(name) === 1 ? name : `${name} (${number})`]),
  );
  return (antenna) => labels.get(antenna) ?? String(antenna);
}

/** The labels of the antennas that the measure "antenna" names. */
export function measuredLabels(measures: Measures): AntennaLabel {
  const antennas = measures.get("antenna");
  const names = new Set(antennas?.table.columnNames());
  if (antennas === undefined || !names.has("antenna") || !names.has("name")) return String;
  const rows = Array.from({ length: antennas.table.numRows() }, (_, row) => ({
    number: Number(antennas.table.get("antenna", row)),
    name: antennas.table.get("name", row) as string | null,
  }));
  return antennaLabels(rows);
}

/** A selection in words: `antenna N07, sub-band 1, channels 40 to 44, 2024-06-15 02:14:00 to 02:31:00 UTC`. */
export function scopeWords(scope: Selection, label: AntennaLabel = String): string {
  const parts: string[] = [];
  if (scope.antennas !== null) parts.push(listed("antenna", "antennas", scope.antennas.map(label)));
  if (scope.baselines !== null) {
    const names = scope.baselines.map(([a, b]) => `${label(a)}-${label(b)}`);
    parts.push(listed("baseline", "baselines", names));
  }
  if (scope.subbands !== null) parts.push(listed("sub-band", "sub-bands", scope.subbands.map(String)));
  if (scope.channels !== null) {
    const single = scope.channels.length === 1 && scope.channels[0]![0] === scope.channels[0]![1];
    parts.push(listed(single ? "channel" : "channels", "channels", scope.channels.map(channelWords)));
  }
  if (scope.polarizations !== null) parts.push(scope.polarizations.join(" "));
  if (scope.fields !== null) parts.push(listed("field", "fields", scope.fields.map(String)));
  if (scope.time !== null) parts.push(timeWords(scope.time));
  return parts.length === 0 ? "the whole dataset" : parts.join(", ");
}

function channelWords([low, high]: readonly [number, number]): string {
  return low === high ? `${low}` : `${low} to ${high}`;
}

function listed(one: string, many: string, members: readonly string[]): string {
  if (members.length === 0) return `no ${one}`;
  if (members.length === 1) return `${one} ${members[0]}`;
  if (members.length > MOST_NAMED) {
    const named = members.slice(0, MOST_NAMED - 1).join(", ");
    return `${many} ${named} and ${members.length - MOST_NAMED + 1} more`;
  }
  return `${many} ${members.slice(0, -1).join(", ")} and ${members.at(-1)}`;
}

/** A time range as a person reads it: the day once, whole seconds. */
export function timeWords([start, end]: readonly [number, number]): string {
  const from = isoFromMjd(start);
  const to = isoFromMjd(end);
  if (from === to) return `at ${from.replace("T", " ")} UTC`;
  const sameDay = from.slice(0, 10) === to.slice(0, 10);
  return `${from.replace("T", " ")} to ${sameDay ? to.slice(11) : to.replace("T", " ")} UTC`;
}
