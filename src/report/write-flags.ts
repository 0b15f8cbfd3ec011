/** The suggested flags in other formats than JSON, beside flags.json: the same selections in each. */
import { join } from "node:path";
import { CannotHoldFlags } from "../dataset/cannot-hold.ts";
import { flagFits } from "../flags/flag-fits.ts";
import { flagTable } from "../flags/flag-table.ts";
import { tableBytes } from "../util/column-table.ts";
import { writeBytesFile } from "../util/write-file.ts";
import { makeFolder } from "./make-folder.ts";
import type { Check } from "./report.ts";

/** idi: a FLAG table of a FITS-IDI file */
export const FLAG_FORMATS = ["csv", "parquet", "idi"] as const;
export type FlagFormat = (typeof FLAG_FORMATS)[number];

const NAMES: Readonly<Record<FlagFormat, string>> = {
  csv: "flags.csv",
  parquet: "flags.parquet",
  idi: "flags.fits",
};

export interface WrittenFlags {
  readonly paths: readonly string[];
  /** sentences about formats that cannot hold these flags, and were not written */
  readonly refused: readonly string[];
}

type Flagged = Pick<Check, "dataset" | "flags"> & { readonly survey: Pick<Check["survey"], "times"> };

/** @throws InputError when the folder or a file cannot be written */
export async function writeFlags(
  check: Flagged,
  folder: string,
  formats: readonly FlagFormat[],
): Promise<WrittenFlags> {
  const paths: string[] = [];
  const refused: string[] = [];
  if (formats.length > 0) await makeFolder(folder);
  for (const format of [...new Set(formats)]) {
    const path = join(folder, NAMES[format]);
    try {
      await writeBytesFile(path, await flagBytes(check, format));
      paths.push(path);
    } catch (error) {
      if (!(error instanceof CannotHoldFlags)) throw error;
      refused.push(`${NAMES[format]} was not written: ${error.message}. Use another format of flags.`);
    }
  }
  return { paths, refused };
}

/** @throws CannotHoldFlags where the format has no way to say what is selected */
export async function flagBytes(
  { dataset, flags, survey }: Flagged,
  format: FlagFormat,
): Promise<Uint8Array> {
  if (format === "idi") return flagFits(dataset, flags, survey.times);
  return tableBytes(flagTable(dataset.name, flags), format);
}
