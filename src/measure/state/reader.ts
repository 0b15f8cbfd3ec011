/** Takes a state apart, and refuses what no accumulator could have written. */
import { InputError, type Place } from "../../util/errors.ts";
import type { ArrayKind, StateValue } from "./value.ts";

export class StateReader {
  private readonly value: StateValue;
  private readonly place: Place;
  /** such as `amplitudes.bank` */
  private readonly path: string;

  constructor(value: StateValue, place: Place = {}, path = "") {
    this.value = value;
    this.place = place;
    this.path = path;
  }

  /** A record or list inside this record. */
  child(key: string): StateReader {
    return new StateReader(this.at(key), this.place, this.path === "" ? key : `${this.path}.${key}`);
  }

  /** The items of this list; null where an item is null. */
  items(most = Number.POSITIVE_INFINITY): (StateReader | null)[] {
    if (!Array.isArray(this.value)) throw this.error("expected a list");
    const list = this.value as readonly StateValue[];
    if (list.length > most) throw this.error(`it has ${list.length} items: expected at most ${most}`);
    return list.map((item, i) =>
      item === null ? null : new StateReader(item, this.place, `${this.path}[${i}]`),
    );
  }

  boolean(key: string): boolean {
    const value = this.at(key);
    if (typeof value !== "boolean") throw this.error("expected true or false", key);
    return value;
  }

  isNull(key: string): boolean {
    return this.at(key) === null;
  }

  text(key: string): string {
    const value = this.at(key);
    if (typeof value !== "string") throw this.error("expected a text", key);
    return value;
  }

  texts(key: string): readonly string[] {
    const value = this.at(key);
    if (Array.isArray(value) && value.every((item) => typeof item === "string")) return value;
    throw this.error("expected a list of texts", key);
  }

  /** Any number, NaN too. */
  number(key: string): number {
    const value = this.at(key);
    if (typeof value !== "number") throw this.error("expected a number", key);
    return value;
  }

  /** A whole number. */
  integer(key: string, low = 0, high = Number.MAX_SAFE_INTEGER): number {
    const value = this.number(key);
    if (!Number.isSafeInteger(value) || value < low || value > high) {
      throw this.error(`${value} is out of range: expected a whole number from ${low} to ${high}`, key);
    }
    return value;
  }

  /** An array of a kind. @param length that it must have; undefined: any */
  array<K extends ArrayKind>(kind: K, key: string, length?: number): InstanceType<K> {
    const value = this.at(key);
    if (!(value instanceof kind)) throw this.error(`expected a ${kind.name}`, key);
    if (length !== undefined && value.length !== length) {
      throw this.error(`it holds ${value.length} numbers: expected ${length}`, key);
    }
    return value as InstanceType<K>;
  }

  /** As `array`, all of it at least `low` and below `end`, and whole. */
  indices<K extends ArrayKind>(
    kind: K,
    key: string,
    length: number | undefined,
    low: number,
    end: number,
  ): InstanceType<K> {
    const array = this.array(kind, key, length);
    for (let i = 0; i < array.length; i++) {
      const value = array[i]!;
      if (!(value >= low && value < end && Number.isInteger(value))) {
        throw this.error(`${value} is out of range: expected whole numbers from ${low} to ${end - 1}`, key);
      }
    }
    return array;
  }

  /** As `array`, of how many of something there are. */
  counts<K extends ArrayKind>(kind: K, key: string, length?: number): InstanceType<K> {
    return this.indices(kind, key, length, 0, Number.MAX_SAFE_INTEGER);
  }

  /** As `array`, all of it finite. */
  finite<K extends ArrayKind>(kind: K, key: string, length?: number): InstanceType<K> {
    const array = this.array(kind, key, length);
    for (let i = 0; i < array.length; i++) {
      if (!Number.isFinite(array[i])) throw this.error("a number is not finite", key);
    }
    return array;
  }

  /** A list of arrays of a kind and length; null where there is none. @param most items of the list */
  arrays<K extends ArrayKind>(
    kind: K,
    key: string,
    length: number,
    most: number,
  ): (InstanceType<K> | null)[] {
    const list = this.at(key);
    if (!Array.isArray(list) || list.length > most) {
      throw this.error(`expected a list of at most ${most} arrays`, key);
    }
    return (list as readonly StateValue[]).map((item) => {
      if (item === null) return null;
      if (item instanceof kind && item.length === length) return item as InstanceType<K>;
      throw this.error(`expected a ${kind.name} of ${length} numbers`, key);
    });
  }

  error(found: string, key?: string): InputError {
    const path = key === undefined ? this.path : this.path === "" ? key : `${this.path}.${key}`;
    const part = [this.place.part, path].filter((words) => words !== undefined && words !== "").join(", ");
    return new InputError(found, { ...this.place, part }, "The file is damaged: make the part again");
  }

  private at(key: string): StateValue {
    const { value } = this;
    if (value === null || typeof value !== "object" || ArrayBuffer.isView(value) || Array.isArray(value)) {
      throw this.error("expected a record");
    }
    const record = value as { readonly [key: string]: StateValue };
    if (!Object.hasOwn(record, key)) throw this.error("it is missing", key);
    return record[key]!;
  }
}
