/**
 * Tells two versions of a dataset apart without reading them whole: the sizes of its files and what stands at places
 * spread over each, headers and tables at both ends among them. A change of a few bytes between those places is not
 * seen.
 */
import { createHash } from "node:crypto";
import { open, stat } from "node:fs/promises";
import { InputError } from "../util/errors.ts";
import type { Dataset } from "./dataset.ts";

/** Bytes at either end of a file, and at each of the places between. */
const END_BYTES = 1 << 16;
const PLACE_BYTES = 1 << 12;
const PLACES = 64;

/** @returns SHA-256 in hexadecimal; it does not depend on names or folders */
export async function fingerprintOf({ files }: Pick<Dataset, "files">): Promise<string> {
  const hash = createHash("sha256");
  for (const path of files) {
    try {
      const { size } = await stat(path);
      hash.update(`${size}\n`);
      const handle = await open(path);
      try {
        for (const [from, bytes] of placesIn(size)) {
          const { buffer, bytesRead } = await handle.read(new Uint8Array(bytes), 0, bytes, from);
          hash.update(buffer.subarray(0, bytesRead));
        }
      } finally {
        await handle.close();
      }
    } catch (cause) {
      const code = (cause as NodeJS.ErrnoException).code ?? "unknown error";
      throw new InputError(`the file cannot be read (${code})`, { file: path }, undefined, { cause });
    }
  }
  return hash.digest("hex");
}

/** [first byte, bytes], ascending. */
function placesIn(size: number): (readonly [number, number])[] {
  if (size <= 2 * END_BYTES) return [[0, size]];
  const step = (size - 2 * END_BYTES) / PLACES;
  const between = Array.from(
    { length: PLACES },
    (_, i) => [Math.floor(END_BYTES + i * step), PLACE_BYTES] as const,
  );
  return [[0, END_BYTES], ...between, [size - END_BYTES, END_BYTES]];
}
