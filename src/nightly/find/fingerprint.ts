/** Files by what is in them: the same content under another name, or at another time, is the same dataset. */
import { createHash } from "node:crypto";
import { type BigIntStats, createReadStream } from "node:fs";
import { stat } from "node:fs/promises";
import { InputError } from "../../util/errors.ts";
import type { SeenFile } from "../history/store.ts";

const READ_BYTES = 1 << 22;

/** Modification and status change: a program that keeps the one moves the other. */
export function changedOf({ mtimeNs, ctimeNs }: BigIntStats): string {
  return `${mtimeNs}/${ctimeNs}`;
}

/**
 * @param seen what the file was last time: a file that has not been touched since is not read again
 * @throws InputError when it cannot be read, or changes meanwhile
 */
export async function fingerprint(path: string, seen: SeenFile | undefined): Promise<SeenFile> {
  const before = await status(path);
  const changed = changedOf(before);
  const bytes = Number(before.size);
  if (seen !== undefined && seen.bytes === bytes && seen.changed === changed) return seen;
  const content = await hashOf(path);
  if (changedOf(await status(path)) !== changed) throw stillWritten(path);
  return { path, bytes, changed, content };
}

/** Of several files, in their order. */
export function contentOf(files: readonly SeenFile[]): string {
  if (files.length === 1) return files[0]!.content;
  const hash = createHash("sha256");
  for (const { content } of files) hash.update(content);
  return hash.digest("hex");
}

export function stillWritten(path: string): InputError {
  return new InputError("the file changed while it was read", { file: path }, "It is left for the next run");
}

async function hashOf(path: string): Promise<string> {
  const hash = createHash("sha256");
  try {
    for await (const chunk of createReadStream(path, { highWaterMark: READ_BYTES }))
      hash.update(chunk as Buffer);
  } catch (cause) {
    throw unreadable(path, cause);
  }
  return hash.digest("hex");
}

async function status(path: string): Promise<BigIntStats> {
  try {
    return await stat(path, { bigint: true });
  } catch (cause) {
    throw unreadable(path, cause);
  }
}

function unreadable(path: string, cause: unknown): InputError {
  const code = (cause as NodeJS.ErrnoException).code ?? "";
  return new InputError(
    `the file cannot be read${code === "" ? "" : ` (${code})`}`,
    { file: path },
    "Check that it is there and that you may read it",
    { cause },
  );
}
