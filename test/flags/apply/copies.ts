/** Copies with flags, made and looked at by the tests of `apply`. */
import { mkdtempSync, readFileSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterAll } from "vitest";
import { openDataset } from "../../../src/dataset/open.ts";
import { EVERYTHING, type Selection } from "../../../src/dataset/selection.ts";
import type { AcceptedFlag } from "../../../src/flags/accepted.ts";
import { type Applied, type ApplyRequest, applyFlags } from "../../../src/flags/apply/apply.ts";

/** A flag of what `parts` select. */
export function flag(parts: Partial<Selection>, id = "F1"): AcceptedFlag {
  return { ...EVERYTHING, ...parts, id, rule: "burst", reason: "for a test" };
}

/** A folder that goes with the tests of a file. */
export function outputFolder(): string {
  const folder = mkdtempSync(join(tmpdir(), "visvet-apply-"));
  afterAll(() => rmSync(folder, { recursive: true }));
  return folder;
}

export interface Copy extends Applied {
  readonly before: Buffer;
  readonly after: Buffer;
}

/** Apply flags to the file at `path`, and the bytes of both. */
export async function copyOf(
  path: string,
  out: string,
  flags: readonly AcceptedFlag[],
  more: Partial<ApplyRequest> = {},
): Promise<Copy> {
  const before = readFileSync(path);
  const applied = await applyFlags({ dataset: await openDataset(path), flags, out, ...more });
  if (!readFileSync(path).equals(before)) throw new Error(`${path} was changed`);
  return { ...applied, before, after: readFileSync(out) };
}

/** Bytes at which two files of one length differ. */
export function differences(a: Buffer, b: Buffer): number[] {
  if (a.length !== b.length) throw new Error(`${a.length} bytes and ${b.length}`);
  const found: number[] = [];
  for (let i = 0; i < a.length; i++) if (a[i] !== b[i]) found.push(i);
  return found;
}

export async function lineOfRejection(promise: Promise<unknown>): Promise<string> {
  try {
    await promise;
  } catch (error) {
    return (error as { line?: string }).line ?? String(error);
  }
  throw new Error("it was not refused");
}
