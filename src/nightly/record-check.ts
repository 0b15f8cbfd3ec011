/** What the history keeps of a check: the verdict, the findings, and the numbers that trends are sought in. */
import { mean, median } from "simple-statistics";
import { type DetectedEvent, INTERFERENCE_KINDS } from "../detect/event.ts";
import type { Check } from "../report/report.ts";
import { scopeWords } from "../report/scope.ts";
import type { Finding } from "../rules/finding.ts";
import { isoFromMjd } from "../util/dates.ts";
import { formatFrequency, formatLength } from "../util/units.ts";
import type { FindingRecord, InterferenceRecord, JudgedRecord, MeasuredRecord } from "./history/records.ts";
import { chartValue, TREND_MEASURES } from "./measures.ts";

/** Stretches of the band that are followed. */
const MOST_STRETCHES = 128;

export type CheckParts = Pick<
  JudgedRecord,
  | "verdict"
  | "score"
  | "scoreAfter"
  | "night"
  | "start"
  | "end"
  | "field"
  | "band"
  | "low"
  | "high"
  | "cause"
  | "findings"
  | "measured"
  | "interference"
>;

export function partsOfCheck(check: Check): CheckParts {
  const { survey, dataset, findings } = check;
  const [start, end] = [survey.times[0] ?? Number.NaN, survey.times.at(-1) ?? Number.NaN];
  const { low, high } = bandOf(check);
  const words = scopeWords(dataset);
  const records = findings.map((finding) => recordOf(finding, check, words.scope(finding.scope)));
  const interference = interferenceOf(check, start, end);
  return {
    verdict: check.verdict,
    score: check.before.score,
    scoreAfter: check.after.score,
    night: Number.isNaN(start) ? "" : isoFromMjd(start).slice(0, 10),
    start,
    end,
    field: dataset.fields.map(({ name }) => name.trim()).join(", "),
    band: `${formatFrequency(low, 5)} to ${formatFrequency(high, 5)}, ${dataset.shape.subbands * dataset.shape.channels} channels`,
    low,
    high,
    cause: records.length === 0 ? null : causeOf(records[0]!),
    findings: records,
    measured: [
      ...antennaValues(check),
      ...baselineValues(check),
      ...channelValues(check, interference, end - start),
      ...ruleValues(check),
    ],
    interference,
  };
}

function causeOf({ title, place }: FindingRecord): string {
  return place === "the whole dataset" ? title : `${title}: ${place}`;
}

function bandOf({ dataset }: Check): { low: number; high: number } {
  let [low, high] = [Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY];
  for (const { frequencies, channelWidths } of dataset.setups) {
    frequencies.forEach((frequency, i) => {
      const half = channelWidths[Math.floor(i / dataset.shape.channels)]! / 2;
      low = Math.min(low, frequency - half);
      high = Math.max(high, frequency + half);
    });
  }
  return { low, high };
}

function recordOf(finding: Finding, { dataset }: Check, place: string): FindingRecord {
  const names = new Map(dataset.array.antennas.map(({ number, name }) => [number, name.trim()]));
  const numbers = [...(finding.scope.antennas ?? []), ...(finding.scope.baselines ?? []).flat()];
  return {
    rule: finding.rule,
    family: finding.family,
    verdict: finding.verdict,
    severity: finding.severity,
    title: finding.title,
    place,
    antennas: [...new Set(numbers)].map((number) => names.get(number) ?? String(number)),
    consequence: finding.consequence.text,
  };
}

function rowsOf(check: Check, name: string): Record<string, unknown>[] {
  return (check.measures.get(name)?.table.objects() ?? []) as Record<string, unknown>[];
}

function antennaValues(check: Check): MeasuredRecord[] {
  const wanted = TREND_MEASURES.filter(({ kind }) => kind === "antenna");
  return rowsOf(check, "antenna")
    .filter((row) => Number(row.samples) > 0)
    .flatMap((row) =>
      wanted.map((measure) => ({
        kind: "antenna" as const,
        item: String(row.name ?? row.antenna).trim(),
        measure: measure.key,
        value: chartValue(measure, Number(row[measure.key])),
      })),
    );
}

/** Baselines by the octave of their longest spacing. */
function baselineValues(check: Check): MeasuredRecord[] {
  const groups = new Map<number, Record<string, unknown>[]>();
  for (const row of rowsOf(check, "baseline")) {
    const length = Number(row.uv_max_m);
    if (!(length > 0)) continue;
    const octave = Math.floor(Math.log2(length));
    groups.set(octave, [...(groups.get(octave) ?? []), row]);
  }
  const wanted = TREND_MEASURES.filter(({ kind }) => kind === "baseline group");
  return [...groups].flatMap(([octave, rows]) =>
    wanted.map((measure) => ({
      kind: "baseline group" as const,
      item: `${formatLength(2 ** octave)} to ${formatLength(2 ** (octave + 1))}`,
      measure: measure.key,
      value: typical(rows.map((row) => chartValue(measure, Number(row[measure.key])))),
    })),
  );
}

function channelValues(
  check: Check,
  interference: readonly InterferenceRecord[],
  duration: number,
): MeasuredRecord[] {
  const rows = rowsOf(check, "channel").sort((a, b) => Number(a.frequency_hz) - Number(b.frequency_hz));
  const size = Math.max(1, Math.ceil(rows.length / MOST_STRETCHES));
  const width = Math.max(...(check.dataset.setups[0]?.channelWidths ?? [0]));
  const wanted = TREND_MEASURES.filter(({ kind, key }) => kind === "channel" && key !== "interference");
  const records: MeasuredRecord[] = [];
  for (let from = 0; from < rows.length; from += size) {
    const stretch = rows.slice(from, from + size);
    const low = Number(stretch[0]!.frequency_hz) - width / 2;
    const high = Number(stretch.at(-1)!.frequency_hz) + width / 2;
    const item = `${formatFrequency(low, 6)} to ${formatFrequency(high, 6)}`;
    const put = (measure: string, value: number) => records.push({ kind: "channel", item, measure, value });
    for (const measure of wanted) {
      put(measure.key, typical(stretch.map((row) => chartValue(measure, Number(row[measure.key])))));
    }
    const hit = interference.filter((seen) => seen.high > low && seen.low < high);
    const time = hit.reduce((sum, seen) => sum + seen.end - seen.start, 0);
    put("interference", duration > 0 ? Math.min(1, time / duration) : Number.NaN);
  }
  return records;
}

/** A rule without a finding has its severity too: none. */
function ruleValues(check: Check): MeasuredRecord[] {
  return check.rulesFrom.map(({ id }) => ({
    kind: "rule",
    item: id,
    measure: "severity",
    value: Math.max(0, ...check.findings.filter(({ rule }) => rule === id).map(({ severity }) => severity)),
  }));
}

function typical(values: readonly number[]): number {
  const known = values.filter((value) => Number.isFinite(value));
  if (known.length === 0) return Number.NaN;
  return known.length > 2 ? median(known) : mean(known);
}

function interferenceOf(check: Check, start: number, end: number): InterferenceRecord[] {
  return check.events
    .filter(({ kind }) => INTERFERENCE_KINDS.has(kind) && kind !== "lone-samples")
    .flatMap((event) => stretchesOf(event, check, start, end));
}

function stretchesOf(
  { scope }: DetectedEvent,
  check: Check,
  start: number,
  end: number,
): InterferenceRecord[] {
  const { dataset } = check;
  const { subbands, channels } = dataset.shape;
  const setup = dataset.setups[0]!;
  const [from, to] = scope.time ?? [start, end];
  const half = check.survey.integration / 2 / 86_400;
  return (scope.subbands ?? Array.from({ length: subbands }, (_, s) => s)).flatMap((s) =>
    (scope.channels ?? [[0, channels - 1] as const]).map(([first, last]) => {
      const ends = [setup.frequencies[s * channels + first]!, setup.frequencies[s * channels + last]!];
      const edge = setup.channelWidths[s]! / 2;
      return {
        low: Math.min(...ends) - edge,
        high: Math.max(...ends) + edge,
        start: from - half,
        end: to + half,
      };
    }),
  );
}
