/**
 * A share of a survey in a file: what it is of, and its state. All numbers are as the machine keeps them, which the file
 * says; a checksum over everything tells a damaged file.
 *
 *     bytes 0..7    "VISVETPT"
 *     8..11         version of this layout and of the state of every accumulator
 *     12..15        0x01020304, for the order of bytes
 *     16..23        length of the whole file
 *     24..31        length of the identity, a multiple of 8
 *     32..          identity, then state; the last 32 bytes are the SHA-256 of all before them
 */
import { createHash } from "node:crypto";
import { open } from "node:fs/promises";
import { InputError, type Place } from "../../util/errors.ts";
import { writePieces } from "../../util/write-file.ts";
import { decodeState } from "./decode.ts";
import { encodeState } from "./encode.ts";
import { type PartIdentity, readIdentity } from "./identity.ts";
import { StateReader } from "./reader.ts";
import { ALIGNMENT, type StateRecord } from "./value.ts";

/** Goes up with every change of the layout or of what any accumulator counts. */
export const STATE_VERSION = 1;

const MAGIC = "VISVETPT";
const BYTE_ORDER = 0x01020304;
const HEAD_BYTES = 32;
const HASH_BYTES = 32;
/** No state in any sensible memory is larger, nor any identity. */
const MOST_BYTES = 4e9;
const MOST_IDENTITY_BYTES = 1 << 24;
const AGAIN = "The file is damaged: make the part again";

/** A part as its file has it; the state is checked when a survey takes it over. */
export interface PartFile {
  readonly identity: PartIdentity;
  readonly state: StateReader;
}

/** Write a part beside its name and rename it. @throws InputError when it cannot be written */
export async function writePart(path: string, identity: PartIdentity, state: StateRecord): Promise<void> {
  const head = Buffer.alloc(HEAD_BYTES);
  const about = padded(Buffer.concat(encodeState(identity as unknown as StateRecord)));
  const pieces = encodeState(state);
  const bytes = pieces.reduce((sum, { length }) => sum + length, 0);
  head.write(MAGIC, "latin1");
  head.writeUInt32LE(STATE_VERSION, 8);
  new Uint32Array(head.buffer, head.byteOffset, HEAD_BYTES / 4)[3] = BYTE_ORDER;
  head.writeBigUInt64LE(BigInt(HEAD_BYTES + about.length + bytes + HASH_BYTES), 16);
  head.writeBigUInt64LE(BigInt(about.length), 24);
  await writePieces(path, withChecksum([head, about, ...pieces]));
}

function* withChecksum(pieces: readonly Uint8Array[]): Generator<Uint8Array> {
  const hash = createHash("sha256");
  for (const piece of pieces) {
    hash.update(piece);
    yield piece;
  }
  yield hash.digest();
}

function padded(bytes: Buffer): Buffer {
  return Buffer.concat([bytes, Buffer.alloc((ALIGNMENT - (bytes.length % ALIGNMENT)) % ALIGNMENT)]);
}

/** What a part is of, without its state. @throws InputError where the file is no whole part */
export async function readPartIdentity(path: string): Promise<PartIdentity> {
  return withFile(path, async (read, size) => {
    const { identityBytes } = headOf(await read(0, HEAD_BYTES), size, { file: path });
    return identityFrom(await read(HEAD_BYTES, identityBytes), { file: path, byte: HEAD_BYTES });
  });
}

/** @throws InputError where the file is damaged, was cut, or is something else */
export async function readPart(path: string): Promise<PartFile> {
  return withFile(path, async (read, size) => {
    const place = { file: path };
    const { identityBytes } = headOf(await read(0, HEAD_BYTES), size, place);
    const bytes = await read(0, size);
    const end = size - HASH_BYTES;
    const digest = createHash("sha256").update(bytes.subarray(0, end)).digest();
    if (!digest.equals(bytes.subarray(end))) throw new InputError("its checksum is another", place, AGAIN);
    const from = HEAD_BYTES + identityBytes;
    const identity = identityFrom(bytes.subarray(HEAD_BYTES, from), { ...place, byte: HEAD_BYTES });
    const state = decodeState(bytes.subarray(from, end), { ...place, byte: from });
    return { identity, state: new StateReader(state, place) };
  });
}

type Read = (from: number, bytes: number) => Promise<Uint8Array<ArrayBuffer>>;

async function withFile<T>(path: string, use: (read: Read, size: number) => Promise<T>): Promise<T> {
  const place = { file: path };
  const handle = await open(path).catch((cause: NodeJS.ErrnoException) => {
    const gone = cause.code === "ENOENT";
    throw new InputError(
      gone ? "there is no such file" : `the file cannot be read (${cause.code})`,
      place,
      gone ? "Make the part, or check the spelling and the folder" : undefined,
      { cause },
    );
  });
  try {
    const status = await handle.stat();
    if (!status.isFile())
      throw new InputError("this is not a regular file", place, "Name the parts themselves");
    return await use(async (from, bytes) => {
      const into = new Uint8Array(new ArrayBuffer(bytes));
      let done = 0;
      while (done < bytes) {
        const { bytesRead } = await handle.read(into, done, bytes - done, from + done);
        if (bytesRead === 0) throw new InputError(`the file ends at byte ${from + done}`, place, AGAIN);
        done += bytesRead;
      }
      return into;
    }, status.size);
  } finally {
    await handle.close();
  }
}

function headOf(bytes: Uint8Array<ArrayBuffer>, size: number, place: Place): { identityBytes: number } {
  const head = Buffer.from(bytes.buffer);
  if (head.toString("latin1", 0, 8) !== MAGIC) {
    throw new InputError("this is no part of a survey", place, "Name the files that visvet part wrote");
  }
  const version = head.readUInt32LE(8);
  if (version !== STATE_VERSION) {
    throw new InputError(
      `the part is of version ${version}: this program reads ${STATE_VERSION}`,
      place,
      "Make parts and join them with the same visvet",
    );
  }
  if (new Uint32Array(bytes.buffer)[3] !== BYTE_ORDER) {
    throw new InputError(
      "the part was made on a machine of another byte order",
      place,
      "Join it on such a machine",
    );
  }
  const promised = Number(head.readBigUInt64LE(16));
  if (promised !== size) {
    throw new InputError(`${promised} bytes are promised, and the file has ${size}`, place, AGAIN);
  }
  const identityBytes = Number(head.readBigUInt64LE(24));
  const most = Math.min(MOST_IDENTITY_BYTES, size - HEAD_BYTES - HASH_BYTES);
  if (identityBytes > most || identityBytes % ALIGNMENT !== 0) {
    throw new InputError(`an identity of ${identityBytes} bytes: expected at most ${most}`, place, AGAIN);
  }
  if (size > MOST_BYTES) throw new InputError(`${size} bytes are too many for a part`, place, AGAIN);
  return { identityBytes };
}

function identityFrom(bytes: Uint8Array<ArrayBuffer>, place: Place): PartIdentity {
  return readIdentity(new StateReader(decodeState(bytes, place, true), place));
}
