/** Checks put into a history and read back. */
import type { Family, Verdict } from "../../rules/finding.ts";
import type { Connection } from "./history.ts";
import type { CheckRecord, CheckRow, FindingRecord, SeriesKind } from "./records.ts";

/** What a file was when it was last looked at. */
export interface SeenFile {
  readonly path: string;
  readonly bytes: number;
  /** modification and status change, nanoseconds */
  readonly changed: string;
  /** SHA-256 */
  readonly content: string;
}

export function saveCheck(connection: Connection, record: CheckRecord, files: readonly SeenFile[]): void {
  connection.run("DELETE FROM dataset_check WHERE content = ? AND judged_by = ?", [
    record.content,
    record.judgedBy,
  ]);
  const judged = record.error === null ? record : null;
  const { lastInsertRowid } = connection.run(
    `INSERT INTO dataset_check (content, judged_by, name, path, bytes, night, time_start, time_end, field, band,
       frequency_low, frequency_high, verdict, score, score_after, cause, error, plan, report, tool, checked)
     VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?, ?)`,
    [
      record.content,
      record.judgedBy,
      record.name,
      record.path,
      record.bytes,
      record.night,
      known(judged?.start),
      known(judged?.end),
      judged?.field ?? null,
      judged?.band ?? null,
      known(judged?.low),
      known(judged?.high),
      judged?.verdict ?? null,
      known(judged?.score),
      known(judged?.scoreAfter),
      judged?.cause ?? null,
      record.error,
      record.plan,
      judged?.report ?? null,
      record.tool,
      record.checked,
    ],
  );
  for (const file of files) saveFile(connection, file);
  if (record.error === null) saveParts(connection, Number(lastInsertRowid), record);
}

export function saveFile(connection: Connection, { path, bytes, changed, content }: SeenFile): void {
  connection.run("INSERT OR REPLACE INTO seen_file (path, bytes, changed, content) VALUES (?, ?, ?, ?)", [
    path,
    bytes,
    changed,
    content,
  ]);
}

function saveParts(
  connection: Connection,
  id: number,
  { findings, measured, interference }: CheckRecord & { readonly error: null },
): void {
  insertAll(
    connection,
    `INSERT INTO finding (check_id, rule, family, verdict, severity, title, place, antennas, consequence)
     VALUES (?, ?, ?, ?, ?, ?, ?, ?, ?)`,
    findings.map((finding) => [
      id,
      finding.rule,
      finding.family,
      finding.verdict,
      finding.severity,
      finding.title,
      finding.place,
      JSON.stringify(finding.antennas),
      finding.consequence,
    ]),
  );
  insertAll(
    connection,
    "INSERT INTO measured (check_id, kind, item, measure, value) VALUES (?, ?, ?, ?, ?)",
    measured
      .filter(({ value }) => Number.isFinite(value))
      .map(({ kind, item, measure, value }) => [id, kind, item, measure, value]),
  );
  insertAll(
    connection,
    `INSERT INTO interference (check_id, frequency_low, frequency_high, time_start, time_end)
     VALUES (?, ?, ?, ?, ?)`,
    interference.map(({ low, high, start, end }) => [id, low, high, start, end]),
  );
}

function insertAll(connection: Connection, sql: string, rows: readonly (string | number)[][]): void {
  const statement = connection.prepare(sql);
  try {
    for (const row of rows) statement.run(row);
  } finally {
    statement.finalize();
  }
}

/** SQLite has no NaN. */
function known(value: number | undefined): number | null {
  return value === undefined || !Number.isFinite(value) ? null : value;
}

export function seenFiles(connection: Connection): Map<string, SeenFile> {
  const rows = connection.all("SELECT path, bytes, changed, content FROM seen_file") as unknown as SeenFile[];
  return new Map(rows.map((row) => [row.path, row]));
}

/** Whether these files were judged by this plan and these rules already. */
export function isJudged(connection: Connection, content: string, judgedBy: string): boolean {
  const values = [content, judgedBy];
  return connection.get("SELECT id FROM dataset_check WHERE content = ? AND judged_by = ?", values) !== null;
}

interface StoredCheck {
  readonly id: number;
  readonly content: string;
  readonly judged_by: string;
  readonly name: string;
  readonly path: string;
  readonly bytes: number;
  readonly night: string;
  readonly time_start: number | null;
  readonly time_end: number | null;
  readonly field: string | null;
  readonly band: string | null;
  readonly frequency_low: number | null;
  readonly frequency_high: number | null;
  readonly verdict: Verdict | null;
  readonly score: number | null;
  readonly score_after: number | null;
  readonly cause: string | null;
  readonly error: string | null;
  readonly plan: string | null;
  readonly report: string | null;
  readonly tool: string;
  readonly checked: string;
}

/** Every check, by night, then by when the observation began, then by name. */
export function allChecks(connection: Connection): CheckRow[] {
  const rows = connection.all(
    "SELECT * FROM dataset_check ORDER BY night, time_start, name, id",
  ) as unknown as StoredCheck[];
  const findings = findingsByCheck(connection);
  return rows.map((row) => rowOf(row, findings.get(row.id) ?? []));
}

function rowOf(row: StoredCheck, findings: readonly FindingRecord[]): CheckRow {
  const { id, content, name, path, bytes, night, plan, tool, checked } = row;
  const identity = { id, content, judgedBy: row.judged_by, name, path, bytes, night, plan, tool, checked };
  if (row.error !== null) return { ...identity, error: row.error };
  return {
    ...identity,
    error: null,
    verdict: row.verdict!,
    score: row.score ?? Number.NaN,
    scoreAfter: row.score_after ?? Number.NaN,
    start: row.time_start ?? Number.NaN,
    end: row.time_end ?? Number.NaN,
    field: row.field ?? "",
    band: row.band ?? "",
    low: row.frequency_low ?? Number.NaN,
    high: row.frequency_high ?? Number.NaN,
    cause: row.cause,
    report: row.report ?? "",
    findings,
  };
}

function findingsByCheck(connection: Connection): Map<number, FindingRecord[]> {
  const rows = connection.all(
    `SELECT check_id, rule, family, verdict, severity, title, place, antennas, consequence
     FROM finding ORDER BY check_id, rowid`,
  ) as unknown as (Omit<FindingRecord, "antennas"> & {
    check_id: number;
    antennas: string;
    family: Family;
  })[];
  const findings = new Map<number, FindingRecord[]>();
  for (const { check_id, antennas, ...rest } of rows) {
    const own = findings.get(check_id) ?? [];
    if (own.length === 0) findings.set(check_id, own);
    own.push({ ...rest, antennas: JSON.parse(antennas) as string[] });
  }
  return findings;
}

/** The values of one series, a night one. */
export interface Series {
  readonly band: string;
  readonly kind: SeriesKind;
  readonly item: string;
  readonly measure: string;
  /** YYYY-MM-DD, ascending */
  readonly nights: readonly string[];
  /** median over the datasets of the night */
  readonly values: Float64Array;
}

/** Every series, in order of band, kind, item and measure. */
export function allSeries(connection: Connection): Series[] {
  const statement = connection.prepare(
    `SELECT c.band AS band, m.kind AS kind, m.item AS item, m.measure AS measure, c.night AS night, m.value AS value
     FROM measured m JOIN dataset_check c ON c.id = m.check_id
     ORDER BY c.band, m.kind, m.item, m.measure, c.night, m.value`,
  );
  try {
    return gather(statement.iterate() as unknown as Iterable<MeasuredRow>);
  } finally {
    statement.finalize();
  }
}

interface MeasuredRow {
  readonly band: string;
  readonly kind: SeriesKind;
  readonly item: string;
  readonly measure: string;
  readonly night: string;
  readonly value: number;
}

function gather(rows: Iterable<MeasuredRow>): Series[] {
  const series: Series[] = [];
  let open: { row: MeasuredRow; nights: string[]; values: number[]; tonight: number[] } | null = null;
  const closeNight = () => {
    if (open === null) return;
    open.nights.push(open.row.night);
    open.values.push(middleOf(open.tonight));
  };
  const closeSeries = () => {
    if (open === null) return;
    closeNight();
    const { band, kind, item, measure } = open.row;
    series.push({ band, kind, item, measure, nights: open.nights, values: Float64Array.from(open.values) });
  };
  for (const row of rows) {
    const last: MeasuredRow | undefined = (open as { row: MeasuredRow } | null)?.row;
    const same =
      last?.band === row.band &&
      last.kind === row.kind &&
      last.item === row.item &&
      last.measure === row.measure;
    if (!same) {
      closeSeries();
      open = { row, nights: [], values: [], tonight: [] };
    } else if (last.night !== row.night) {
      closeNight();
      open = { ...open!, row, tonight: [] };
    }
    open!.tonight.push(row.value);
  }
  closeSeries();
  return series;
}

/** Median of ascending values. */
function middleOf(sorted: readonly number[]): number {
  const half = sorted.length >> 1;
  return sorted.length % 2 === 1 ? sorted[half]! : (sorted[half - 1]! + sorted[half]!) / 2;
}

/** Interference of every check, with the night and when the check's data were taken. */
export interface SeenInterference {
  readonly check: number;
  readonly band: string;
  readonly night: string;
  readonly low: number;
  readonly high: number;
  readonly start: number;
  readonly end: number;
}

export function allInterference(connection: Connection): SeenInterference[] {
  return connection.all(
    `SELECT c.id AS "check", c.band AS band, c.night AS night, i.frequency_low AS low, i.frequency_high AS high,
       i.time_start AS start, i.time_end AS end
     FROM interference i JOIN dataset_check c ON c.id = i.check_id
     ORDER BY c.night, c.id, i.frequency_low, i.time_start`,
  ) as unknown as SeenInterference[];
}

export function deleteChecks(connection: Connection, ids: readonly number[]): void {
  for (const id of ids) connection.run("DELETE FROM dataset_check WHERE id = ?", [id]);
}
