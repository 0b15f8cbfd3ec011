/**
 * Bytes of a state back into values. The bytes may be anybody's: every length is held against what is left before
 * anything is made of it, so that nothing is allocated that the bytes do not hold.
 */
import { InputError, type Place } from "../../util/errors.ts";
import {
  ALIGNMENT,
  ARRAY_KINDS,
  MOST_DEEP,
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

/**
 * @param bytes  begin at a multiple of 8 of their buffer, which arrays of the result keep alive and share
 * @param place  of the first byte in its file
 * @param padded  zeros may follow
 * @throws InputError at the byte where they are no state
 */
export function decodeState(bytes: Uint8Array<ArrayBuffer>, place: Place = {}, padded = false): StateValue {
  const decoder = new Decoder(bytes, place);
  const value = decoder.value(0);
  decoder.end(padded);
  return value;
}

class Decoder {
  private readonly bytes: Uint8Array<ArrayBuffer>;
  private readonly view: DataView;
  private readonly place: Place;
  private readonly text = new TextDecoder("utf-8", { fatal: true });
  private at = 0;

  constructor(bytes: Uint8Array<ArrayBuffer>, place: Place) {
    if (bytes.byteOffset % ALIGNMENT !== 0) throw new RangeError(`bytes begin at ${bytes.byteOffset}`);
    this.bytes = bytes;
    this.view = new DataView(bytes.buffer, bytes.byteOffset, bytes.byteLength);
    this.place = place;
  }

  value(depth: number): StateValue {
    if (depth > MOST_DEEP) throw this.error(`values lie more than ${MOST_DEEP} deep in each other`);
    const tag = this.bytes[this.take(1, "a value")]!;
    switch (tag) {
      case TAG_NULL:
        return null;
      case TAG_FALSE:
        return false;
      case TAG_TRUE:
        return true;
      case TAG_NUMBER:
        return this.view.getFloat64(this.take(8, "a number"), true);
      case TAG_TEXT:
        return this.string();
      case TAG_LIST:
        return this.list(depth);
      case TAG_RECORD:
        return this.record(depth);
      default:
        return this.array(tag);
    }
  }

  end(padded: boolean): void {
    const rest = this.bytes.subarray(this.at);
    if (padded && rest.length < ALIGNMENT && rest.every((byte) => byte === 0)) return;
    if (rest.length > 0) throw this.error(`${this.bytes.length - this.at} bytes follow the state`);
  }

  private string(): string {
    const length = this.length(1);
    const from = this.take(length, "a text");
    try {
      return this.text.decode(this.bytes.subarray(from, from + length));
    } catch {
      throw this.error("a text is not UTF-8");
    }
  }

  private list(depth: number): StateValue[] {
    const length = this.length(1);
    const values: StateValue[] = [];
    for (let i = 0; i < length; i++) values.push(this.value(depth + 1));
    return values;
  }

  private record(depth: number): StateValue {
    // A key is at least its length, a value its tag.
    const length = this.length(5);
    const entries: [string, StateValue][] = [];
    for (let i = 0; i < length; i++) entries.push([this.string(), this.value(depth + 1)]);
    return Object.fromEntries(entries);
  }

  private array(tag: number): StateArray {
    const kind = ARRAY_KINDS[tag - TAG_ARRAY];
    if (kind === undefined) throw this.error(`no value begins with the byte ${tag}`);
    const length = this.length(kind.BYTES_PER_ELEMENT);
    this.take((ALIGNMENT - (this.at % ALIGNMENT)) % ALIGNMENT, "an array");
    const from = this.take(length * kind.BYTES_PER_ELEMENT, "an array");
    return new kind(this.bytes.buffer, this.bytes.byteOffset + from, length);
  }

  /** How many of something follow, each of at least `bytes`. */
  private length(bytes: number): number {
    const length = this.view.getUint32(this.take(4, "a length"), true);
    if (length * bytes > this.bytes.length - this.at) {
      throw this.error(`${length} things are promised, and ${this.bytes.length - this.at} bytes are left`);
    }
    return length;
  }

  /** Go on by `bytes`. @returns where they begin */
  private take(bytes: number, what: string): number {
    const from = this.at;
    if (from + bytes > this.bytes.length) throw this.error(`the bytes end inside ${what}`);
    this.at += bytes;
    return from;
  }

  private error(found: string): InputError {
    const { byte = 0 } = this.place;
    return new InputError(
      found,
      { ...this.place, byte: byte + this.at },
      "The file is damaged: make the part again",
    );
  }
}
