/**
 * One night's work: find the datasets that are new or have changed, judge each against its plan, write its reports, and
 * keep what it said. Each dataset is done and remembered by itself: a run that is killed loses nothing but the dataset at
 * hand, and the next run goes on from there.
 */
import { createHash } from "node:crypto";
import { readFile, rm, stat } from "node:fs/promises";
import { join, relative, resolve } from "node:path";
import type { Dataset } from "../dataset/dataset.ts";
import { openDataset } from "../dataset/open.ts";
import { readPlan } from "../dataset/plan-file.ts";
import { type CheckRequest, checkDataset } from "../report/check.ts";
import { makeFolder } from "../report/make-folder.ts";
import { tool } from "../report/tool.ts";
import { writeReports } from "../report/write-reports.ts";
import type { RuleSet } from "../rules/rule.ts";
import { InputError } from "../util/errors.ts";
import type { Workers } from "../util/workers.ts";
import { writeTextFile } from "../util/write-file.ts";
import { type Candidate, findCandidates } from "./find/candidates.ts";
import { changedOf, contentOf, fingerprint, stillWritten } from "./find/fingerprint.ts";
import { type Patience, settled } from "./find/settled.ts";
import { History } from "./history/history.ts";
import type { CheckRecord, CheckRow } from "./history/records.ts";
import {
  allChecks,
  allInterference,
  allSeries,
  deleteChecks,
  isJudged,
  type SeenFile,
  saveCheck,
  saveFile,
  seenFiles,
} from "./history/store.ts";
import { takeLock } from "./lock.ts";
import { indexContent, indexPage } from "./page/page.ts";
import { choosePlan, type PlanChoice } from "./plans.ts";
import { partsOfCheck } from "./record-check.ts";
import { beyond, type Keep } from "./retention.ts";
import { summaryJson } from "./summary.ts";
import { type Trends, trendsOf } from "./trends.ts";

export const INDEX_PAGE = "index.html";

export interface NightlyRequest {
  readonly folder: string;
  readonly history: string;
  /** folder of the reports and the index page */
  readonly out: string;
  readonly choices: readonly PlanChoice[];
  readonly rules: RuleSet;
  readonly patience: Patience;
  readonly keep: Keep | null;
  /** delete what is beyond `keep`; otherwise it is only named */
  readonly prune: boolean;
  /** what every check is given besides its plan */
  readonly check: Omit<CheckRequest, "plan" | "rules" | "workers">;
  /** threads for a dataset; closed when it is done */
  readonly workersFor?: (dataset: Dataset) => Workers | undefined;
  readonly onDataset?: (path: string, done: number, of: number) => void;
}

export interface NightlyResult {
  /** judged in this run, or not to be judged; in order of their nights */
  readonly news: readonly CheckRow[];
  /** datasets that were judged before and have not changed */
  readonly unchanged: number;
  /** still being written, left for the next run: paths below the folder */
  readonly unsettled: readonly string[];
  /** everything the history holds, in order of the nights */
  readonly checks: readonly CheckRow[];
  readonly trends: Trends;
  /** beyond what is to be kept: deleted when pruning, otherwise to be */
  readonly beyond: readonly CheckRow[];
}

/** @throws InputError when the folder or a plan cannot be read, or the history cannot be written */
export async function runNightly(request: NightlyRequest): Promise<NightlyResult> {
  const release = await takeLock(request.history);
  try {
    return await new Night(request).run();
  } finally {
    await release();
  }
}

class Night {
  private readonly request: NightlyRequest;
  private readonly history: History;
  private readonly news = new Set<string>();
  private readonly unsettled: string[] = [];
  private unchanged = 0;

  constructor(request: NightlyRequest) {
    this.request = request;
    this.history = new History(request.history);
  }

  async run(): Promise<NightlyResult> {
    const { folder, choices, out, patience, onDataset } = this.request;
    await this.history.prepare();
    // A plan that is wrong is said before anything is judged.
    for (const plan of new Set(choices.map((choice) => choice.plan))) if (plan !== null) await readPlan(plan);
    const candidates = await findCandidates(folder, choices, [
      join(folder, relative(resolve(folder), resolve(out))),
    ]);
    await makeFolder(out);
    let done = 0;
    const leave = ({ path }: Candidate) => void this.unsettled.push(path);
    for await (const candidate of settled(candidates, patience, leave)) {
      onDataset?.(candidate.path, done, candidates.length);
      await this.take(candidate);
      done += 1;
    }
    return this.result();
  }

  /** Judge a candidate, unless it has been. */
  private async take(candidate: Candidate): Promise<void> {
    const seen = await this.history.read(seenFiles);
    let files: SeenFile[] = [];
    let judgedBy = "";
    let plan: string | null = null;
    try {
      files = await Promise.all(candidate.files.map((file) => fingerprint(file, seen.get(file))));
      plan = await this.planOf(candidate).catch(nullIfUnreadable);
      judgedBy = await this.judgedBy(plan);
      if (await this.history.read((connection) => isJudged(connection, contentOf(files), judgedBy))) {
        this.unchanged += 1;
        await this.remember(files, seen);
        return;
      }
      await this.judge(candidate, files, plan, judgedBy);
    } catch (error) {
      if (error instanceof InputError && error.message === stillWritten("").message) {
        this.unsettled.push(candidate.path);
        return;
      }
      if (isOfOurs(error, this.request)) throw error;
      await this.keepFailure(candidate, files, plan, judgedBy, error);
    }
  }

  /** Path of the plan file; null where none is for it. Only conditions on the data need it opened. */
  private async planOf({ path, files }: Candidate): Promise<string | null> {
    const { choices } = this.request;
    const byPath = choices.every(({ field, frequency }) => field === null && frequency === null);
    const dataset = byPath ? { fields: [], setups: [] } : await openDataset(files);
    return choosePlan(choices, path, dataset)?.plan ?? null;
  }

  private async judgedBy(plan: string | null): Promise<string> {
    const hash = createHash("sha256");
    hash.update(plan === null ? "" : await readFile(plan, "utf8"));
    hash.update(JSON.stringify(this.request.rules.rules));
    return hash.digest("hex");
  }

  private async judge(
    candidate: Candidate,
    files: readonly SeenFile[],
    plan: string | null,
    judgedBy: string,
  ): Promise<void> {
    const { rules, out } = this.request;
    const dataset = await openDataset(candidate.files.length === 1 ? candidate.files[0]! : candidate.files);
    const asked = plan === null ? {} : await readPlan(plan);
    const workers = this.request.workersFor?.(dataset);
    const check = await checkDataset(dataset, {
      ...this.request.check,
      plan: asked,
      rules,
      workers,
    }).finally(() => workers?.close());
    for (const file of files) {
      const now = await stat(file.path, { bigint: true }).catch(() => null);
      if (now === null || changedOf(now) !== file.changed) throw stillWritten(file.path);
    }
    const parts = partsOfCheck(check);
    const identity = this.identity(candidate, files, plan, judgedBy);
    const night = parts.night || identity.night;
    const report = `${night}/${safeName(dataset.name)}-${identity.content.slice(0, 8)}-${judgedBy.slice(0, 4)}`;
    await writeReports(check, join(out, report));
    await this.save({ ...identity, ...parts, night, name: dataset.name, error: null, report }, files);
  }

  private async keepFailure(
    candidate: Candidate,
    files: readonly SeenFile[],
    plan: string | null,
    judgedBy: string,
    error: unknown,
  ): Promise<void> {
    const line =
      error instanceof InputError
        ? error.line
        : `visvet failed in a way it should not: ${error instanceof Error ? (error.stack ?? error.message) : error}`;
    // A file that could not even be read has no content to know it by: it is looked at again every night.
    const known = files.length > 0 ? files : await this.unread(candidate);
    await this.save({ ...this.identity(candidate, known, plan, judgedBy), error: line }, files);
  }

  private async unread({ files }: Candidate): Promise<SeenFile[]> {
    return Promise.all(
      files.map(async (path) => {
        const status = await stat(path, { bigint: true }).catch(() => null);
        const content = createHash("sha256").update(`unread ${path}`).digest("hex");
        return { path, bytes: Number(status?.size ?? 0), changed: "", content };
      }),
    );
  }

  private identity({ path }: Candidate, files: readonly SeenFile[], plan: string | null, judgedBy: string) {
    const checked = new Date().toISOString();
    return {
      content: contentOf(files),
      judgedBy,
      name: path.slice(path.lastIndexOf("/") + 1),
      path,
      bytes: files.reduce((sum, { bytes }) => sum + bytes, 0),
      night: checked.slice(0, 10),
      plan,
      tool: tool().version,
      checked,
    };
  }

  private async save(record: CheckRecord, files: readonly SeenFile[]): Promise<void> {
    await this.history.change((connection) => saveCheck(connection, record, files));
    this.news.add(`${record.content} ${record.judgedBy}`);
  }

  /** Files that were touched or renamed and have not changed. */
  private async remember(files: readonly SeenFile[], seen: ReadonlyMap<string, SeenFile>): Promise<void> {
    const moved = files.filter((file) => seen.get(file.path)?.changed !== file.changed);
    if (moved.length === 0) return;
    await this.history.change((connection) => {
      for (const file of moved) saveFile(connection, file);
    });
  }

  private async result(): Promise<NightlyResult> {
    const { keep, prune, out } = this.request;
    let checks = await this.history.read(allChecks);
    const old = keep === null ? [] : beyond(checks, keep);
    if (prune && old.length > 0) {
      await this.history.change((connection) =>
        deleteChecks(
          connection,
          old.map(({ id }) => id),
        ),
      );
      for (const check of old) {
        if (check.error === null) await rm(join(out, check.report), { recursive: true, force: true });
      }
      checks = await this.history.read(allChecks);
    }
    const [interference, trends] = await this.history.read((connection) => {
      const seen = allInterference(connection);
      return [seen, trendsOf(allSeries(connection), seen, checks)] as const;
    });
    const result: NightlyResult = {
      news: checks.filter(({ content, judgedBy }) => this.news.has(`${content} ${judgedBy}`)),
      unchanged: this.unchanged,
      unsettled: this.unsettled,
      checks,
      trends,
      beyond: old,
    };
    await writeTextFile(join(out, INDEX_PAGE), indexPage(indexContent(result, interference)));
    await writeTextFile(join(out, "summary.json"), summaryJson(result));
    return result;
  }
}

/** What goes wrong with the history or the reports ends the run: it is no fault of the dataset. */
function isOfOurs(error: unknown, { history, out }: NightlyRequest): boolean {
  if (!(error instanceof InputError)) return false;
  const file = error.place.file ?? "";
  return file === history || file.startsWith(join(out, "/"));
}

/** Reading it again to judge it says what is wrong with it. */
function nullIfUnreadable(error: unknown): null {
  if (error instanceof InputError) return null;
  throw error;
}

/** A name from a file as the name of a folder. */
function safeName(name: string): string {
  const safe = name.replace(/[^\p{L}\p{N}._-]+/gu, "_").replace(/^\.+/, "_");
  return safe === "" ? "dataset" : safe.slice(0, 80);
}
