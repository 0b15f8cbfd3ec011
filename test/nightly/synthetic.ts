/** Invented nights put straight into a history: what checks would have left there, without any data. */
import type { Connection } from "../../src/nightly/history/history.ts";
import type { JudgedRecord, MeasuredRecord } from "../../src/nightly/history/records.ts";
import { saveCheck } from "../../src/nightly/history/store.ts";
import { dateFromMjd, mjdFromDate } from "../../src/util/dates.ts";

export const FIRST_NIGHT = mjdFromDate("2026-01-01");
export const nightOf = (index: number) => dateFromMjd(FIRST_NIGHT + index);

export function record(index: number, part: Partial<JudgedRecord> = {}): JudgedRecord {
  const night = nightOf(index);
  return {
    content: `content-${index}-${part.name ?? "night"}`,
    judgedBy: "by",
    name: `night-${index}`,
    path: `night-${index}.uvfits`,
    bytes: 1e6,
    night,
    plan: null,
    tool: "0.0.0",
    checked: `${night}T12:00:00Z`,
    error: null,
    verdict: "ready",
    score: 96,
    scoreAfter: 97,
    start: FIRST_NIGHT + index + 0.4,
    end: FIRST_NIGHT + index + 0.7,
    field: "Heron Field",
    band: "1.392 GHz to 1.411 GHz, 20 channels",
    low: 1.392e9,
    high: 1.411e9,
    cause: null,
    report: `${night}/night-${index}`,
    findings: [],
    measured: [],
    interference: [],
    ...part,
  };
}

export function amplitude(antenna: string, value: number): MeasuredRecord {
  return { kind: "antenna", item: antenna, measure: "amplitude_ratio", value };
}

export function put(connection: Connection, ...records: readonly JudgedRecord[]): void {
  for (const one of records) saveCheck(connection, one, []);
}
