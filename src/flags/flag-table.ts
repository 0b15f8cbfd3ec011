/**
 * Flags as a table, one row a flag: what flags.csv and flags.parquet hold. Lists are text, so that both formats and a
 * spreadsheet hold the same: "3 7", "1-2 1-3", "0-4 9", "XX YY"; "all" where the flag does not ask, "none" for a list
 * without members, which selects nothing.
 */
import { POLARIZATIONS } from "../dataset/dataset.ts";
import type { CellType, ColumnTable } from "../util/column-table.ts";
import { InputError, nearest, type Place } from "../util/errors.ts";
import type { FlagCost, FlagEntry } from "./entry.ts";

/** A row as it is read: text, or numbers where the format has them; null for a missing cell. */
export type FlagRecord = Readonly<Record<string, string | number | bigint | null | undefined>>;

interface FlagColumn {
  readonly name: string;
  readonly type: CellType;
  readonly unit?: string;
  readonly meaning: string;
  /** a table without it is refused, since a part that is left out would select everything */
  readonly needed?: boolean;
  readonly value: (flag: FlagEntry, dataset: string) => string | number | null;
}

const COSTS = {
  sensitivityLossFraction: ["sensitivity_loss", "share of the sensitivity that is lost, natural weighting"],
  beamMajorChangeFraction: ["beam_major_change", "relative change of the beam's major axis"],
  beamMinorChangeFraction: ["beam_minor_change", "relative change of the beam's minor axis"],
  peakSidelobeChangeFraction: ["peak_sidelobe_change", "relative change of the largest sidelobe"],
  largestGapChangeFraction: ["largest_gap_change", "relative change of the largest gap in the coverage"],
} as const satisfies Record<keyof FlagCost, readonly [string, string]>;
const COST_KEYS = Object.keys(COSTS) as (keyof FlagCost)[];

const COLUMNS: readonly FlagColumn[] = [
  { name: "id", type: "text", meaning: "name of the flag", needed: true, value: ({ id }) => id },
  { name: "rule", type: "text", meaning: "rule that suggests it", value: ({ rule }) => rule },
  { name: "reason", type: "text", meaning: "why, in a sentence", value: ({ reason }) => reason },
  {
    name: "antennas",
    type: "text",
    meaning: "every baseline to any of these antenna numbers",
    needed: true,
    value: ({ antennas }) => listText(antennas, String),
  },
  {
    name: "baselines",
    type: "text",
    meaning: "pairs of antenna numbers, either way round, such as 1-2",
    needed: true,
    value: ({ baselines }) => listText(baselines, ([a, b]) => `${a}-${b}`),
  },
  {
    name: "time_start",
    type: "number",
    unit: "d",
    meaning: "first integration centre, MJD (UTC), included; missing together with time_end: all times",
    needed: true,
    value: ({ time }) => time?.[0] ?? null,
  },
  {
    name: "time_end",
    type: "number",
    unit: "d",
    meaning: "last integration centre, MJD (UTC), included",
    needed: true,
    value: ({ time }) => time?.[1] ?? null,
  },
  {
    name: "subbands",
    type: "text",
    meaning: "sub-bands, from 0",
    needed: true,
    value: ({ subbands }) => listText(subbands, String),
  },
  {
    name: "channels",
    type: "text",
    meaning: "channels or ranges of channels, from 0, both ends included, in each of the sub-bands",
    needed: true,
    value: ({ channels }) =>
      listText(channels, ([low, high]) => (low === high ? String(low) : `${low}-${high}`)),
  },
  {
    name: "polarizations",
    type: "text",
    meaning: "products by their Stokes names, such as XX",
    needed: true,
    value: ({ polarizations }) => listText(polarizations, String),
  },
  {
    name: "fields",
    type: "text",
    meaning: "ids of fields",
    needed: true,
    value: ({ fields }) => listText(fields, String),
  },
  {
    name: "samples",
    type: "number",
    meaning: "samples it takes that were not flagged before",
    value: ({ samples }) => samples,
  },
  {
    name: "fraction",
    type: "number",
    meaning: "share of the samples not flagged before; NaN unknown",
    value: ({ fraction }) => fraction,
  },
  {
    name: "confidence",
    type: "number",
    meaning: "0 to 1, that it removes a fault and not sky; NaN unknown",
    value: ({ confidence }) => confidence,
  },
  ...COST_KEYS.map((key) => ({
    name: COSTS[key][0],
    type: "number" as const,
    meaning: `${COSTS[key][1]}; NaN unknown`,
    value: ({ cost }: FlagEntry) => cost[key],
  })),
  {
    name: "dataset",
    type: "text",
    meaning: "name of the dataset that it was suggested for",
    value: (_, dataset) => dataset,
  },
];

export function flagTable(dataset: string, flags: readonly FlagEntry[]): ColumnTable {
  return {
    title: `visvet-flags 1: flags suggested for ${dataset}, for a person to accept`,
    rows: flags.length,
    columns: COLUMNS.map(({ name, type, unit, meaning, value }) => ({
      name,
      type,
      unit: unit ?? "",
      meaning,
      values: flags.map((flag) => value(flag, dataset)),
    })),
  };
}

function listText<T>(list: readonly T[] | null, text: (member: T) => string): string {
  if (list === null) return "all";
  return list.length === 0 ? "none" : list.map(text).join(" ");
}

/** @throws InputError for a table without the columns that a selection has */
export function requireColumns(names: readonly string[], place: Place): void {
  for (const { name, needed } of COLUMNS) {
    if (needed !== true || names.includes(name)) continue;
    const near = nearest(name, names);
    throw new InputError(
      `the table of flags has no column ${name}`,
      place,
      near === undefined ? "visvet check --flags-as csv writes one" : `Is "${near}" meant for it?`,
    );
  }
}

/** @throws InputError naming the column, at `place` */
export function flagOfRecord(record: FlagRecord, place: Place): FlagEntry {
  const text = (name: string) => String(record[name] ?? "");
  const number = (name: string) => numberOf(record, name, place) ?? Number.NaN;
  const list = <T>(name: string, member: (text: string) => T | undefined) =>
    listOf(record, name, member, place);
  const id = text("id").trim();
  if (id === "") throw new InputError("id is empty: expected the name of the flag", place);
  const samples = number("samples");
  return {
    id,
    rule: text("rule"),
    reason: text("reason"),
    antennas: list("antennas", wholeOf),
    baselines: list("baselines", pairOf),
    time: timeOf(record, place),
    subbands: list("subbands", indexOf),
    channels: list("channels", rangeOf),
    polarizations: list("polarizations", (name) => POLARIZATIONS.find((one) => one === name)),
    fields: list("fields", wholeOf),
    samples: Number.isNaN(samples) ? 0 : samples,
    fraction: number("fraction"),
    confidence: number("confidence"),
    cost: costOf(number),
  };
}

function costOf(number: (name: string) => number): FlagCost {
  const cost = Object.fromEntries(COST_KEYS.map((key) => [key, number(COSTS[key][0])]));
  return cost as Record<keyof FlagCost, number>;
}

function timeOf(record: FlagRecord, place: Place): [number, number] | null {
  const start = numberOf(record, "time_start", place);
  const end = numberOf(record, "time_end", place);
  if (start === null && end === null) return null;
  if (start === null || end === null || !(start <= end)) {
    throw new InputError(
      `time_start is ${start ?? "missing"} and time_end ${end ?? "missing"}`,
      place,
      "Give both, the first not after the second, or neither for all times",
    );
  }
  return [start, end];
}

function numberOf(record: FlagRecord, name: string, place: Place): number | null {
  const value = record[name] ?? null;
  if (value === null || value === "") return null;
  if (typeof value !== "string") return Number(value);
  const number = /^nan$/i.test(value.trim()) ? Number.NaN : Number(value);
  if (Number.isNaN(number) && !/^nan$/i.test(value.trim())) {
    throw new InputError(`${name} is "${value}": expected a number`, place);
  }
  return number;
}

const MOST_MEMBERS = 100_000;

function listOf<T>(
  record: FlagRecord,
  name: string,
  member: (text: string) => T | undefined,
  place: Place,
): T[] | null {
  const text = String(record[name] ?? "").trim();
  if (text === "all") return null;
  if (text === "none") return [];
  if (text === "") {
    // An empty cell taken for "all" would flag more than anybody meant.
    throw new InputError(`${name} is empty`, place, 'Write "all" where the flag does not ask');
  }
  const words = text.split(/[\s,;]+/);
  if (words.length > MOST_MEMBERS) {
    throw new InputError(`${name} has ${words.length} members: expected at most ${MOST_MEMBERS}`, place);
  }
  return words.map((word) => {
    const value = member(word);
    if (value === undefined) throw new InputError(`${name} has "${word}": ${EXPECTED[name]}`, place);
    return value;
  });
}

const EXPECTED: Readonly<Record<string, string>> = {
  antennas: "expected antenna numbers",
  baselines: "expected pairs of antenna numbers such as 1-2",
  subbands: "expected sub-bands, from 0",
  channels: "expected channels, or ranges such as 0-4",
  polarizations: `expected names among ${POLARIZATIONS.join(", ")}`,
  fields: "expected ids of fields",
} satisfies Partial<Record<keyof FlagEntry, string>>;

function wholeOf(text: string): number | undefined {
  return /^-?\d{1,9}$/.test(text) ? Number(text) : undefined;
}

function indexOf(text: string): number | undefined {
  return /^\d{1,9}$/.test(text) ? Number(text) : undefined;
}

function pairOf(text: string): [number, number] | undefined {
  const match = /^(-?\d{1,9})-(-?\d{1,9})$/.exec(text);
  return match === null ? undefined : [Number(match[1]), Number(match[2])];
}

function rangeOf(text: string): [number, number] | undefined {
  const match = /^(\d{1,9})(?:-(\d{1,9}))?$/.exec(text);
  if (match === null) return undefined;
  const [low, high] = [Number(match[1]), Number(match[2] ?? match[1])];
  return low <= high ? [low, high] : undefined;
}
