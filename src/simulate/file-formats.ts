/** The formats that a simulated dataset is written in, told by the suffix of the file's name. */
import type { Dataset } from "../dataset/dataset.ts";
import { writeColumnar } from "./write-columnar.ts";
import { writeFitsIdi } from "./write-fits-idi.ts";
import { writeUvfits } from "./write-uvfits.ts";

export interface WriteOptions {
  /** what the file says of where it comes from, where the format has a place for it */
  readonly history?: readonly string[];
  /** default: refuse when the file is there */
  readonly overwrite?: boolean;
  /** called as rows are written */
  readonly onRows?: (done: number, of: number) => void;
}

export interface FileFormat {
  /** lower case, with the dot */
  readonly suffixes: readonly string[];
  readonly write: (dataset: Dataset, path: string, options: WriteOptions) => Promise<void>;
}

const RANDOM_GROUPS: FileFormat = { suffixes: [".uvfits", ".fits", ".uvf", ".fit"], write: writeUvfits };

const FORMATS: readonly FileFormat[] = [
  RANDOM_GROUPS,
  { suffixes: [".idifits", ".idi"], write: writeFitsIdi },
  { suffixes: [".parquet", ".arrow", ".csv", ".tsv"], write: writeColumnar },
];

/** Random groups for a suffix that is none of the formats'. */
export function formatOf(path: string): FileFormat {
  return FORMATS.find((format) => suffixOf(path, format) !== undefined) ?? RANDOM_GROUPS;
}

/** Without the suffix of its format. */
export function withoutSuffix(path: string): string {
  const suffix = suffixOf(path, formatOf(path)) ?? "";
  return path.slice(0, path.length - suffix.length);
}

function suffixOf(path: string, { suffixes }: FileFormat): string | undefined {
  return suffixes.find((suffix) => path.toLowerCase().endsWith(suffix));
}
