/**
 * A file or folder that was not there before: made in a hidden folder beside it, and given its name only when it is whole
 * and has been looked at. A run that is cut short leaves nothing under the final name; one that is stopped by a signal
 * takes the hidden folder away as well.
 */
import { rmSync } from "node:fs";
import { type FileHandle, link, lstat, mkdir, open, readdir, rename, rm } from "node:fs/promises";
import { basename, dirname, join } from "node:path";
import { InputError } from "./errors.ts";
import { adviceFor } from "./write-file.ts";

const SIGNALS = ["SIGINT", "SIGTERM", "SIGHUP"] as const;

/** Opens a file for writing; tests put one here that fails. */
export type OpenFile = (path: string, flags: string) => Promise<FileHandle>;

export class NewOutput {
  /** where the output is made; its files already have their final names */
  readonly folder: string;
  readonly openFile: OpenFile;
  readonly #path: string;
  readonly #onSignal: (signal: NodeJS.Signals) => void;

  private constructor(path: string, folder: string, openFile: OpenFile) {
    this.#path = path;
    this.folder = folder;
    this.openFile = openFile;
    this.#onSignal = (signal) => {
      rmSync(folder, { recursive: true, force: true });
      this.#release();
      // With our handler gone the signal does what it does by default.
      process.kill(process.pid, signal);
    };
    for (const signal of SIGNALS) process.on(signal, this.#onSignal);
  }

  /** @throws InputError when something has that name already, or its folder cannot be written */
  static async begin(path: string, openFile: OpenFile = open): Promise<NewOutput> {
    await requireNothing(path);
    const folder = join(dirname(path), `.${basename(path)}.${process.pid}.partial`);
    try {
      await mkdir(folder);
    } catch (cause) {
      throw cannotWrite(path, cause);
    }
    return new NewOutput(path, folder, openFile);
  }

  /** Path of the file that will be the output itself. */
  get file(): string {
    return join(this.folder, basename(this.#path));
  }

  /**
   * Give the one file made its name. Never replaces what has appeared there in the meantime.
   *
   * @param besides endings of files made that belong to it, such as ".columns.yaml": they get their names first
   */
  async keepFile(besides: readonly string[] = []): Promise<void> {
    await this.#keep(async () => {
      for (const ending of besides) await link(this.file + ending, this.#path + ending);
      try {
        // Unlike a rename, a link fails where the name is taken.
        await link(this.file, this.#path);
      } catch (cause) {
        const code = codeOf(cause);
        if (code === "EEXIST") throw cause;
        // File systems without links.
        await requireNothing(this.#path);
        await rename(this.file, this.#path);
      }
      await rm(this.folder, { recursive: true, force: true });
    });
  }

  /** Give the whole folder the name. */
  async keepFolder(): Promise<void> {
    await this.#keep(async () => {
      await syncFolder(this.folder);
      await requireNothing(this.#path);
      await rename(this.folder, this.#path);
    });
  }

  /** Leave nothing behind. */
  async drop(): Promise<void> {
    await rm(this.folder, { recursive: true, force: true });
    this.#release();
  }

  async #keep(name: () => Promise<void>): Promise<void> {
    try {
      await name();
      await syncFolder(dirname(this.#path));
    } catch (cause) {
      await this.drop();
      throw cause instanceof InputError ? cause : cannotWrite(this.#path, cause);
    }
    this.#release();
  }

  #release(): void {
    for (const signal of SIGNALS) process.off(signal, this.#onSignal);
  }
}

/** Folders that runs which were killed left beside `path`; those of running processes of this machine are not named. */
export async function leftOver(path: string): Promise<string[]> {
  const start = `.${basename(path)}.`;
  const names = await readdir(dirname(path)).catch(() => []);
  return names
    .filter((name) => {
      const number = name.startsWith(start) ? /^(\d+)\.partial$/.exec(name.slice(start.length)) : null;
      return number !== null && !isRunning(Number(number[1]));
    })
    .sort()
    .map((name) => join(dirname(path), name));
}

function isRunning(pid: number): boolean {
  try {
    process.kill(pid, 0);
    return true;
  } catch (error) {
    return codeOf(error) === "EPERM";
  }
}

/** @throws InputError when anything, be it a link to nowhere, has that name */
export async function requireNothing(path: string): Promise<void> {
  try {
    await lstat(path);
  } catch (error) {
    if (codeOf(error) === "ENOENT") return;
    throw cannotWrite(path, error);
  }
  throw new InputError(
    "there is something of that name already, and nothing is ever overwritten",
    { file: path },
    "Choose another name for --out or move it away",
  );
}

/** The error of a failed write, for the user. */
export function cannotWrite(path: string, cause: unknown): InputError {
  const code = codeOf(cause);
  const what = code === "" ? "" : ` (${code})`;
  return new InputError(`it cannot be written${what}`, { file: path }, adviceFor(code), { cause });
}

function codeOf(error: unknown): string {
  return (error as NodeJS.ErrnoException).code ?? "";
}

/** Some file systems keep names in memory for a while; those that cannot be asked are left alone. */
async function syncFolder(path: string): Promise<void> {
  const handle = await open(path === "" ? "." : path).catch(() => undefined);
  await handle?.sync().catch(() => {});
  await handle?.close();
}
