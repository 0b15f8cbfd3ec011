/** A cursor over bytes in memory, for tests of what reads through one. */
import type { ByteSource, Cursor } from "../../../src/dataset/fits/byte-source.ts";

export function memoryCursor(bytes: Uint8Array): Cursor {
  return {
    read: async (into, at) => {
      const part = bytes.subarray(at, at + into.length);
      into.set(part);
      return part.length;
    },
    reach: async (at) => Math.min(at, bytes.length),
    close: async () => {},
  };
}

export function memorySource(bytes: Uint8Array): ByteSource {
  return {
    path: "made.fits",
    bytesOnDisk: bytes.length,
    sequential: false,
    cursor: async () => memoryCursor(bytes),
  };
}
