/** What a file is, told by what is in it and not by its name. */
import { stat } from "node:fs/promises";
import { openFits } from "./fits/hdus.ts";
import { openSource } from "./fits/source.ts";
import { type FitsVisibilities, visibilitiesIn } from "./open-fits.ts";

export type FileKind = FitsVisibilities | "columnar";

const HEAD_BYTES = 64 * 1024;

/**
 * The first bytes of a file, unpacked where it is gzipped.
 *
 * @throws InputError when it is missing, empty or unreadable
 */
export async function headOf(path: string): Promise<Uint8Array> {
  const source = await openSource(path);
  const cursor = await source.cursor();
  try {
    const head = new Uint8Array(HEAD_BYTES);
    return head.subarray(0, await cursor.read(head, 0));
  } finally {
    await cursor.close();
  }
}

export function isFits(head: Uint8Array): boolean {
  return startsWith(head, "SIMPLE  =");
}

/** Tables that say what they are in their first bytes. */
export function isBinaryTable(head: Uint8Array): boolean {
  return startsWith(head, "PAR1") || startsWith(head, "ARROW1");
}

function startsWith(head: Uint8Array, text: string): boolean {
  return head.length >= text.length && Buffer.from(head.subarray(0, text.length)).toString("latin1") === text;
}

/**
 * The kind of a file that was found by searching; null for what holds no visibilities.
 *
 * @param isTable asked where the file is not FITS
 * @throws InputError when it is a damaged FITS file
 */
export async function kindOfFile(
  path: string,
  isTable: (head: Uint8Array, path: string) => boolean,
): Promise<FileKind | null> {
  const { size } = await stat(path);
  if (size === 0) return null;
  const head = await headOf(path);
  if (isFits(head)) return visibilitiesIn(await openFits(await openSource(path)));
  return isTable(head, path) ? "columnar" : null;
}
