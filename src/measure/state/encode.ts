/** A state as bytes: small values one after the other, large arrays as they lie in memory, without a copy. */
import {
  ALIGNMENT,
  ARRAY_KINDS,
  type StateArray,
  type StateValue,
  TAG_ARRAY,
  TAG_FALSE,
  TAG_LIST,
  TAG_NULL,
  TAG_NUMBER,
  TAG_RECORD,
  TAG_TEXT,
  TAG_TRUE,
} from "./value.ts";

/** Arrays below this many bytes are copied together. */
const SMALL = 4096;
const SCRATCH = 1 << 16;

/**
 * @returns the bytes in pieces, in order. Large arrays are views of the state's own: it must not change until they are
 *          written.
 */
export function encodeState(value: StateValue): Uint8Array[] {
  const encoder = new Encoder();
  encoder.put(value);
  return encoder.finish();
}

class Encoder {
  private readonly pieces: Uint8Array[] = [];
  private scratch = new Uint8Array(SCRATCH);
  private view = new DataView(this.scratch.buffer);
  private used = 0;
  /** bytes in `pieces` */
  private before = 0;
  private readonly text = new TextEncoder();

  put(value: StateValue): void {
    if (value === null) this.byte(TAG_NULL);
    else if (typeof value === "boolean") this.byte(value ? TAG_TRUE : TAG_FALSE);
    else if (typeof value === "number") this.number(value);
    else if (typeof value === "string") {
      this.byte(TAG_TEXT);
      this.string(value);
    } else if (ArrayBuffer.isView(value)) this.array(value);
    else if (isList(value)) {
      this.byte(TAG_LIST);
      this.length(value.length);
      for (const each of value) this.put(each);
    } else {
      const entries = Object.entries(value);
      this.byte(TAG_RECORD);
      this.length(entries.length);
      for (const [key, each] of entries) {
        this.string(key);
        this.put(each);
      }
    }
  }

  finish(): Uint8Array[] {
    this.flush();
    return this.pieces;
  }

  private byte(value: number): void {
    this.reserve(1);
    this.scratch[this.used++] = value;
  }

  private number(value: number): void {
    this.byte(TAG_NUMBER);
    this.reserve(8);
    this.view.setFloat64(this.used, value, true);
    this.used += 8;
  }

  private length(value: number): void {
    this.reserve(4);
    this.view.setUint32(this.used, value, true);
    this.used += 4;
  }

  private string(value: string): void {
    const bytes = this.text.encode(value);
    this.length(bytes.length);
    this.bytes(bytes);
  }

  private array(value: StateArray): void {
    this.byte(TAG_ARRAY + ARRAY_KINDS.findIndex((kind) => value instanceof kind));
    this.length(value.length);
    while ((this.before + this.used) % ALIGNMENT !== 0) this.byte(0);
    this.bytes(new Uint8Array(value.buffer, value.byteOffset, value.byteLength));
  }

  private bytes(bytes: Uint8Array): void {
    if (bytes.length >= SMALL) {
      this.flush();
      this.pieces.push(bytes);
      this.before += bytes.length;
      return;
    }
    this.reserve(bytes.length);
    this.scratch.set(bytes, this.used);
    this.used += bytes.length;
  }

  private reserve(bytes: number): void {
    if (this.used + bytes > this.scratch.length) this.flush();
  }

  private flush(): void {
    if (this.used === 0) return;
    this.pieces.push(this.scratch.subarray(0, this.used));
    this.before += this.used;
    this.used = 0;
    this.scratch = new Uint8Array(SCRATCH);
    this.view = new DataView(this.scratch.buffer);
  }
}

function isList(value: object): value is readonly StateValue[] {
  return Array.isArray(value);
}
