/**
 * The history of earlier checks, an SQLite file. It is never changed in place: a change is made to a copy beside it,
 * which is then renamed, so that a killed run or a full disk leaves the history as it was.
 */
import { constants } from "node:fs";
import { copyFile, open, readdir, rename, rm, rmdir, stat } from "node:fs/promises";
import { basename, dirname, join } from "node:path";
import sqlite from "node-sqlite3-wasm";
import { InputError } from "../../util/errors.ts";
import { adviceFor } from "../../util/write-file.ts";
import { MIGRATIONS } from "./migrations.ts";

export type Connection = InstanceType<typeof sqlite.Database>;

export class History {
  readonly path: string;

  constructor(path: string) {
    this.path = path;
  }

  /**
   * Take away what a killed run left behind. Only for who holds the lock.
   *
   * @throws InputError when the file there is no history, or one of a later version
   */
  async prepare(): Promise<void> {
    const folder = dirname(this.path);
    const name = basename(this.path);
    for (const entry of await readdir(folder)) {
      if (!entry.startsWith(`${name}.`)) continue;
      if (entry.endsWith(".changing")) await rm(join(folder, entry), { force: true });
      if (entry.endsWith(".lock")) await rmdir(join(folder, entry)).catch(() => {});
    }
    const version = await this.read((connection) => versionOf(connection, this.path));
    if (version < MIGRATIONS.length) await this.change(() => {});
  }

  /** Ask the history; one that is not there yet is an empty one. */
  async read<T>(ask: (connection: Connection) => T): Promise<T> {
    const there = (await stat(this.path).catch(() => undefined)) !== undefined;
    const connection = new sqlite.Database(there ? this.path : ":memory:", there ? { readOnly: true } : {});
    try {
      if (!there) migrate(connection, this.path);
      return this.guarded(() => ask(connection));
    } finally {
      connection.close();
    }
  }

  /** Change the history: all of it or nothing. */
  async change<T>(work: (connection: Connection) => T): Promise<T> {
    const beside = `${this.path}.${process.pid}.changing`;
    const old = await stat(this.path).catch(() => undefined);
    try {
      if (old !== undefined) await copyFile(this.path, beside, constants.COPYFILE_FICLONE);
      const connection = new sqlite.Database(beside);
      let result: T;
      try {
        // The copy is worth nothing until it is whole: no journal guards it.
        connection.exec("PRAGMA journal_mode = OFF; PRAGMA synchronous = OFF");
        migrate(connection, this.path);
        connection.exec("BEGIN");
        result = work(connection);
        connection.exec("COMMIT");
      } finally {
        connection.close();
      }
      const handle = await open(beside, "r+");
      try {
        await handle.chmod((old?.mode ?? 0o644) & 0o777);
        await handle.sync();
      } finally {
        await handle.close();
      }
      await rename(beside, this.path);
      return result;
    } catch (cause) {
      await rm(beside, { force: true });
      await rmdir(`${beside}.lock`).catch(() => {});
      throw this.failure(cause);
    }
  }

  private guarded<T>(ask: () => T): T {
    try {
      return ask();
    } catch (cause) {
      throw this.failure(cause);
    }
  }

  private failure(cause: unknown): unknown {
    if (cause instanceof InputError || !(cause instanceof Error)) return cause;
    const code = (cause as NodeJS.ErrnoException).code ?? "";
    const place = { file: this.path };
    if (/not a database|malformed/.test(cause.message)) {
      return new InputError(
        "this is no history of visvet, or it is damaged",
        place,
        "Name the history that earlier runs wrote, or a new file",
        { cause },
      );
    }
    if (/full|disk I\/O|readonly/.test(cause.message) || code !== "") {
      const why = code === "" ? cause.message : code;
      const advice = code === "" ? adviceFor("ENOSPC") : adviceFor(code);
      return new InputError(`the history cannot be written (${why}); it is as it was before`, place, advice, {
        cause,
      });
    }
    return cause;
  }
}

function versionOf(connection: Connection, file: string): number {
  const version = Number((connection.get("PRAGMA user_version") as { user_version: number }).user_version);
  if (version > MIGRATIONS.length) {
    throw new InputError(
      `this history is of version ${version}; this visvet knows ${MIGRATIONS.length}`,
      { file },
      "Use the visvet that wrote it, or a newer one",
    );
  }
  const tables = connection.get("SELECT count(*) AS count FROM sqlite_master") as { count: number };
  if (version === 0 && tables.count > 0) {
    throw new InputError(
      "this SQLite file holds something else than a history",
      { file },
      "Name another file for the history",
    );
  }
  return version;
}

function migrate(connection: Connection, file: string): void {
  for (let version = versionOf(connection, file); version < MIGRATIONS.length; version++) {
    connection.exec(`BEGIN; ${MIGRATIONS[version]}; PRAGMA user_version = ${version + 1}; COMMIT`);
  }
}
