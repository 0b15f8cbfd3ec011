/** Open one FITS file of visibilities, told by its header-data units. */
import { InputError } from "../util/errors.ts";
import { axisLengths, type FitsFile, type Hdu, openFits } from "./fits/hdus.ts";
import { openSource } from "./fits/source.ts";
import { openFitsIdi } from "./fits-idi/open.ts";
import { openRandomGroups } from "./random-groups/open.ts";
import type { OpenedDataset, RowSummary } from "./row-summary.ts";

/** What kind of visibilities a FITS file holds; null for an image and the like. */
export type FitsVisibilities = "random-groups" | "fits-idi";

export function visibilitiesIn({ hdus }: FitsFile): FitsVisibilities | null {
  const [primary, ...extensions] = hdus;
  if (primary.kind === "random groups") return "random-groups";
  // FITS-IDI: a primary HDU without data, and tables by these names.
  const idi = extensions.some(({ name }) => name === "UV_DATA" || name === "ARRAY_GEOMETRY");
  return idi ? "fits-idi" : null;
}

/**
 * The rows are looked at once here (their columns, not their samples), so that what the tables leave out is known.
 *
 * @param known `summary` of the same file from an earlier opening: saves that pass
 * @throws InputError with advice when the file cannot be read, is of another kind, or is malformed
 */
export async function openFitsDataset(path: string, known?: RowSummary): Promise<OpenedDataset> {
  const file = await openFits(await openSource(path));
  const dataset = await openByKind(file, path, known);
  return {
    ...dataset,
    recipe: { kind: "files", paths: [path], options: {}, known: [dataset.summary] },
  };
}

async function openByKind(file: FitsFile, path: string, known?: RowSummary): Promise<OpenedDataset> {
  const [primary] = file.hdus;
  const place = { file: path, part: primary.header.place.part! };
  switch (visibilitiesIn(file)) {
    case "random-groups":
      return openRandomGroups(file, known);
    case "fits-idi":
      return openFitsIdi(file, known);
    case null:
      throw noVisibilities(file, primary, place);
  }
}

function noVisibilities(file: FitsFile, primary: Hdu, place: { file: string; part: string }): InputError {
  if (primary.header.looseNumber("NAXIS1") === 777_777_701) {
    return new InputError(
      "NAXIS1 is 777777701: the visibilities of this archive file are in a binary table, not in random groups",
      place,
      "Export the data as a random-groups FITS file (often called UVFITS)",
    );
  }
  return new InputError(
    `no visibilities: expected random groups (NAXIS1 = 0 and GROUPS = T) or a table UV_DATA, found ${contents(file)}`,
    place,
    primary.header.shown("GROUPS") === "T" && primary.header.has("NAXIS1")
      ? "The header says GROUPS = T, but NAXIS1 is not 0: the file is damaged or of another kind"
      : "Name the file of visibilities, not an image or a table made from them",
  );
}

function contents({ hdus }: FitsFile): string {
  const shown = hdus.slice(0, 6).map(describeHdu).join(", ");
  return hdus.length > 6 ? `${shown} and ${hdus.length - 6} more HDUs` : shown;
}

function describeHdu({ kind, header, name, dataBytes }: Hdu): string {
  const named = name === "" ? "" : ` ${name}`;
  if (kind === "image") {
    return dataBytes === 0 ? "an empty primary" : `an image of ${axisLengths(header).join(" x ")}${named}`;
  }
  return `a ${kind}${named}`;
}
