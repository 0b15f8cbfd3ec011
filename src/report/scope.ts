/** Selections in the user's terms: antennas by name, times in UTC. The names are hostile and escaped by the writers. */
import type { Dataset } from "../dataset/dataset.ts";
import type { Selection } from "../dataset/selection.ts";
import { antennaLabels } from "../rules/scope.ts";
import { isoFromMjd } from "../util/dates.ts";
import { plainText } from "../util/terminal.ts";
import { formatNumber } from "../util/units.ts";

/** Only the parts that narrow it; absent and null mean the same. */
export type Scope = { readonly [Part in keyof Selection]?: Selection[Part] | null };

/** How names and times of one dataset are written. */
export interface ScopeWords {
  /** `Q07`, or `Q07 (7)` where the name alone would not tell */
  antenna(number: number): string;
  /** `Q07-Q11` */
  baseline(antenna1: number, antenna2: number): string;
  /** `21:45:10`, with the date where the dataset has more than one */
  time(mjd: number): string;
  /** `antenna Q07, 21:45:10 to 22:12:00 UTC, sub-band 1, channels 40-44, RR`; "everything" for no part */
  scope(scope: Scope, most?: number): string;
}

/** Longest list of names in a sentence; the rest is counted. */
const MOST_NAMES = 8;

/**
 * @param times integration centres, MJD ascending: a date is only said where there are several
 */
export function scopeWords(dataset: Pick<Dataset, "array" | "fields">, times: ArrayLike<number>): ScopeWords {
  const antenna = antennaLabels(dataset.array.antennas);
  const fieldNames = new Map(dataset.fields.map((field) => [field.id, plainText(field.name).trim()]));
  const first = times.length > 0 ? times[0]! : Number.NaN;
  const last = times.length > 0 ? times[times.length - 1]! : Number.NaN;
  const severalDays = Math.floor(first) !== Math.floor(last);

  const baseline = (a: number, b: number) => `${antenna(a)}-${antenna(b)}`;
  const time = (mjd: number) => {
    const text = isoFromMjd(mjd);
    return severalDays ? text.replace("T", " ") : text.slice(text.indexOf("T") + 1);
  };
  const field = (id: number) => {
    const name = fieldNames.get(id) ?? "";
    return name === "" ? String(id) : name;
  };

  const scope = (what: Scope, most = MOST_NAMES) => {
    const parts: string[] = [];
    if (what.antennas != null) parts.push(listed("antenna", "antennas", what.antennas.map(antenna), most));
    if (what.baselines != null) {
      parts.push(
        listed(
          "baseline",
          "baselines",
          what.baselines.map(([a, b]) => baseline(a, b)),
          most,
        ),
      );
    }
    if (what.time != null) parts.push(timeRange(what.time, time));
    if (what.subbands != null) parts.push(listed("sub-band", "sub-bands", what.subbands.map(String), most));
    if (what.channels != null) parts.push(channelText(what.channels, most));
    if (what.polarizations != null) parts.push(joined(what.polarizations, most));
    if (what.fields != null) parts.push(listed("field", "fields", what.fields.map(field), most));
    return parts.length === 0 ? "the whole dataset" : parts.join(", ");
  };
  return { antenna, baseline, time, scope };
}

function timeRange([start, end]: readonly [number, number], time: (mjd: number) => string): string {
  const from = time(start);
  const to = time(end);
  return from === to ? `at ${from} UTC` : `${from} to ${to} UTC`;
}

function channelText(ranges: readonly (readonly [number, number])[], most: number): string {
  const texts = ranges.map(([low, high]) => (low === high ? String(low) : `${low}-${high}`));
  const single = ranges.length === 1 && ranges[0]![0] === ranges[0]![1];
  return `${single ? "channel" : "channels"} ${joined(texts, most)}`;
}

function listed(one: string, many: string, names: readonly string[], most: number): string {
  if (names.length === 0) return `no ${one}`;
  if (names.length === 1) return names[0]!.startsWith(`${one} `) ? names[0]! : `${one} ${names[0]}`;
  return `${many} ${joined(names, most)}`;
}

function joined(names: readonly string[], most: number): string {
  // One name more takes no more room than saying that there is one more.
  const shown = names.length <= most + 1 ? names : names.slice(0, most);
  const rest = names.length - shown.length;
  if (rest > 0) return `${shown.join(", ")} and ${formatNumber(rest, 9)} more`;
  return shown.length < 2 ? shown.join("") : `${shown.slice(0, -1).join(", ")} and ${shown.at(-1)}`;
}
