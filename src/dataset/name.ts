/** What a dataset is called, from its path. */
import { basename } from "node:path";

/** File name without folder, `.gz` and the suffixes that FITS files and tables go by. */
export function datasetName(path: string): string {
  const name = basename(path);
  const bare = name
    .replace(/\.gz$/i, "")
    .replace(/\.(uvfits|uvfit|uvf|idifits|idi|fits|fit|fts|parquet|arrows?|feather|csv|tsv)$/i, "");
  return bare === "" ? name : bare;
}
