/** What a part of a survey is of: by this parts are told to belong together. */
import type { StateReader } from "./reader.ts";

export interface PartIdentity {
  /** of the program that made it */
  readonly tool: string;
  /** which part, from 0, of how many */
  readonly index: number;
  readonly of: number;
  /** [first, end) */
  readonly firstRow: number;
  readonly endRow: number;
  /** bytes that the whole program may take: it settles what shares sketches and bins */
  readonly memory: number;
  /** Field.id of the only field surveyed; null: all */
  readonly field: number | null;
  readonly dataset: DatasetIdentity;
}

export interface DatasetIdentity {
  /** as `fingerprintOf` gives it */
  readonly fingerprint: string;
  readonly name: string;
  /** absolute, as the user named it: a file, a folder or a glob; hostile text */
  readonly named: readonly string[];
  /** absolute path of the file that says what columns are; null: none */
  readonly columnMap: string | null;
  readonly bytes: number;
  readonly rows: number;
  readonly subbands: number;
  readonly channels: number;
  readonly polarizations: number;
}

/** @throws InputError where it is none */
export function readIdentity(from: StateReader): PartIdentity {
  const dataset = from.child("dataset");
  const of = from.integer("of", 1);
  return {
    tool: from.text("tool"),
    index: from.integer("index", 0, of - 1),
    of,
    firstRow: from.integer("firstRow"),
    endRow: from.integer("endRow"),
    memory: from.integer("memory", 1),
    field: from.isNull("field") ? null : from.integer("field", -(2 ** 31), 2 ** 31),
    dataset: {
      fingerprint: dataset.text("fingerprint"),
      name: dataset.text("name"),
      named: dataset.texts("named"),
      columnMap: dataset.isNull("columnMap") ? null : dataset.text("columnMap"),
      bytes: dataset.integer("bytes"),
      rows: dataset.integer("rows"),
      subbands: dataset.integer("subbands", 1),
      channels: dataset.integer("channels", 1),
      polarizations: dataset.integer("polarizations", 1),
    },
  };
}
