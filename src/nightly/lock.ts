/** One nightly at a time on one history: a file beside it that names the process, and outlives none. */
import { mkdir, open, readFile, rm, rmdir, stat } from "node:fs/promises";
import { hostname } from "node:os";
import { InputError } from "../util/errors.ts";

interface Holder {
  readonly pid: number;
  readonly host: string;
  readonly since: string;
}

/**
 * @returns what gives the lock back
 * @throws InputError when another process holds it
 */
export async function takeLock(history: string): Promise<() => Promise<void>> {
  const path = `${history}.running`;
  const own = JSON.stringify({ pid: process.pid, host: hostname(), since: new Date().toISOString() });
  const release = () => rm(path, { force: true });
  if (await create(path, own)) return release;
  const holder = await holderOf(path);
  if (holder !== null && alive(holder)) {
    throw new InputError(
      `another nightly (process ${holder.pid} on ${holder.host}, since ${holder.since}) works on this history`,
      { file: history },
      `Wait until it ends; if it has, delete ${path}`,
    );
  }
  if (await takeOver(path, own)) return release;
  throw new InputError("another nightly has just begun", { file: history }, "Wait until it ends");
}

/** Nothing takes this long to take a lock over: whoever began it is gone. */
const TAKEOVER_MS = 10_000;

/** Of several that find a lock whose process is gone, one replaces it: the one that makes the folder. */
async function takeOver(path: string, own: string): Promise<boolean> {
  const folder = `${path}.taking-over`;
  const age = Date.now() - ((await stat(folder).catch(() => undefined))?.mtimeMs ?? Date.now());
  if (age > TAKEOVER_MS) await rmdir(folder).catch(() => {});
  try {
    await mkdir(folder);
  } catch {
    return false;
  }
  try {
    const holder = await holderOf(path);
    if (holder !== null && alive(holder)) return false;
    await rm(path, { force: true });
    return await create(path, own);
  } finally {
    await rmdir(folder);
  }
}

async function create(path: string, text: string): Promise<boolean> {
  try {
    const handle = await open(path, "wx");
    try {
      await handle.writeFile(text);
    } finally {
      await handle.close();
    }
    return true;
  } catch (cause) {
    const { code } = cause as NodeJS.ErrnoException;
    if (code === "EEXIST") return false;
    throw new InputError(
      `the lock cannot be made (${code})`,
      { file: path },
      "Name a history in a folder that exists and can be written",
      { cause },
    );
  }
}

/** null where it was cut short: its process died as it wrote it. */
async function holderOf(path: string): Promise<Holder | null> {
  try {
    const { pid, host, since } = JSON.parse(await readFile(path, "utf8")) as Partial<Holder>;
    return Number.isInteger(pid) && typeof host === "string" && typeof since === "string"
      ? { pid: pid!, host, since }
      : null;
  } catch {
    return null;
  }
}

/** A process of another machine can not be asked: it is taken to be alive. */
function alive({ pid, host }: Holder): boolean {
  if (host !== hostname()) return true;
  if (pid === process.pid) return false;
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return (error as NodeJS.ErrnoException).code === "EPERM";
  }
}
