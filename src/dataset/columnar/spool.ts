/**
 * The working copies of tables, in the folder for temporary files: one a table and process, found again by every thread
 * of it, taken away when it ends. What a killed process left is taken away by the next.
 */
import { createHash } from "node:crypto";
import { mkdirSync, readdirSync, readFileSync, renameSync, rmSync, statSync, writeFileSync } from "node:fs";
import { hostname, tmpdir } from "node:os";
import { join } from "node:path";
import { isMainThread } from "node:worker_threads";
import { spoolError } from "./spool-file.ts";

/** Folders for temporary files may be shared with other machines, whose process numbers say nothing here. */
export const SPOOL_PREFIX = `visvet-table-${createHash("sha256").update(hostname()).digest("hex").slice(0, 8)}-`;
const FACTS_FILE = "facts.json";

/** Holds a working copy: while it is reachable, the copy stays. */
export interface Spool<Facts> {
  readonly folder: string;
  readonly facts: Facts;
}

const spools = new Map<string, WeakRef<Spool<unknown>>>();
const owned = new Set<string>();
const unreachable = new FinalizationRegistry<string>((folder) => {
  if (spools.get(folder)?.deref() === undefined) remove(folder);
});
let made = 0;
let watching = false;

/**
 * The working copy of what `identity` names, made by `make` where this process has none yet.
 *
 * @param identity files with their sizes and dates, and the column map
 * @param make fills the folder; what it gives is kept as JSON
 */
export async function spoolOf<Facts>(
  identity: string,
  make: (folder: string) => Promise<Facts>,
): Promise<Spool<Facts>> {
  const key = createHash("sha256").update(identity).digest("hex").slice(0, 24);
  const folder = join(tmpdir(), `${SPOOL_PREFIX}${process.pid}-${key}`);
  const there = spools.get(folder)?.deref();
  if (there !== undefined) return there as Spool<Facts>;
  const known = factsIn<Facts>(folder);
  if (known !== undefined) {
    const spool = { folder, facts: known };
    // Its last holder may be gone already, and the copy not yet.
    return owned.has(folder) ? held(spool) : spool;
  }
  if (!watching) removeAbandoned();
  return makeCopy(folder, make);
}

async function makeCopy<Facts>(
  folder: string,
  make: (folder: string) => Promise<Facts>,
): Promise<Spool<Facts>> {
  made += 1;
  // Its name when it is whole: another thread never finds half a copy.
  const beside = `${folder}.${made}-${Math.random().toString(36).slice(2, 10)}`;
  try {
    mkdirSync(beside, { mode: 0o700 });
  } catch (cause) {
    throw spoolError(beside, cause);
  }
  watch();
  owned.add(beside);
  let facts: Facts;
  let final = folder;
  try {
    facts = await make(beside);
    writeFileSync(join(beside, FACTS_FILE), JSON.stringify(facts, keepOdd), { mode: 0o600 });
    try {
      renameSync(beside, folder);
    } catch {
      // Another thread was first: this copy serves this thread.
      final = beside;
    }
  } catch (error) {
    remove(beside);
    throw error;
  }
  owned.delete(beside);
  owned.add(final);
  return held({ folder: final, facts: revive<Facts>(JSON.stringify(facts, keepOdd)) });
}

/** The copy is taken away when nobody holds `spool` any more. */
function held<Facts>(spool: Spool<Facts>): Spool<Facts> {
  spools.set(spool.folder, new WeakRef(spool));
  unreachable.register(spool, spool.folder);
  return spool;
}

/** Numbers that JSON has no words for. */
function keepOdd(_key: string, value: unknown): unknown {
  return typeof value === "number" && !Number.isFinite(value) ? { odd: String(value) } : value;
}

function revive<Facts>(text: string): Facts {
  return JSON.parse(text, (_key, value: unknown) =>
    typeof value === "object" && value !== null && "odd" in value ? Number(value.odd) : value,
  ) as Facts;
}

function factsIn<Facts>(folder: string): Facts | undefined {
  try {
    const { uid } = statSync(folder);
    // Somebody else's folder of that name is not to be believed.
    if (process.getuid !== undefined && uid !== process.getuid()) return undefined;
    return revive<Facts>(readFileSync(join(folder, FACTS_FILE), "utf8"));
  } catch {
    return undefined;
  }
}

function watch(): void {
  if (watching) return;
  watching = true;
  const removeAll = () => {
    for (const folder of owned) remove(folder);
  };
  process.on("exit", removeAll);
  if (!isMainThread) return;
  for (const signal of ["SIGINT", "SIGTERM", "SIGHUP"] as const) {
    process.once(signal, () => {
      removeAll();
      // With our handler gone, and no other there, the signal does what it does by default.
      if (process.listenerCount(signal) === 0) process.kill(process.pid, signal);
    });
  }
}

function remove(folder: string): void {
  owned.delete(folder);
  spools.delete(folder);
  try {
    rmSync(folder, { recursive: true, force: true });
  } catch {
    // The next process tries again.
  }
}

/** Working copies of processes that are no more. */
function removeAbandoned(): void {
  let names: string[];
  try {
    names = readdirSync(tmpdir());
  } catch {
    return;
  }
  for (const name of names) {
    const owner = name.startsWith(SPOOL_PREFIX)
      ? Number.parseInt(name.slice(SPOOL_PREFIX.length), 10)
      : Number.NaN;
    if (Number.isInteger(owner) && owner !== process.pid && !isAlive(owner)) remove(join(tmpdir(), name));
  }
}

function isAlive(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return (error as NodeJS.ErrnoException).code === "EPERM";
  }
}
