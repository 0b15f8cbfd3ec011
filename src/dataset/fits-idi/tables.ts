/**
 * The tables of a FITS-IDI file, told by EXTNAME, in any order. Names and columns of this format are by the FITS
 * Interferometry Data Interchange Convention (registered with the FITS Support Office in 2009; Greisen 2011, recalled).
 */
import type { FitsFile, Hdu } from "../fits/hdus.ts";
import { distinctVersions, noteSkipped, onlyOne } from "../fits-tables/find-tables.ts";
import type { Notes } from "../notes.ts";

export interface TableHdus {
  /** stations and Earth orientation; EXTVER is the number of the array; ascending, each once */
  readonly geometries: readonly Hdu[];
  /** which number each antenna goes by */
  readonly antennas: readonly Hdu[];
  readonly frequencies: Hdu | undefined;
  readonly sources: Hdu | undefined;
  readonly flags: readonly Hdu[];
  /** visibilities, in file order */
  readonly data: readonly Hdu[];
}

const KINDS = ["ARRAY_GEOMETRY", "ANTENNA", "FREQUENCY", "SOURCE", "FLAG", "UV_DATA"];

/** @throws InputError when there is no table of visibilities */
export function findTables(file: FitsFile, notes: Notes): TableHdus {
  const tables = file.hdus.slice(1).filter(({ kind }) => kind === "binary table");
  const ofKind = (kind: string) => tables.filter(({ name }) => name === kind);
  noteSkipped(file, ({ name }) => KINDS.includes(name), notes);
  const data = ofKind("UV_DATA");
  if (data.length === 0) {
    throw file.hdus[0].header.error(
      "no table is called UV_DATA: expected one, or several, with the visibilities",
      undefined,
      "The file holds the tables around an observation alone: name the file that holds its visibilities",
    );
  }
  return {
    geometries: distinctVersions("ARRAY_GEOMETRY", ofKind("ARRAY_GEOMETRY"), notes),
    antennas: ofKind("ANTENNA"),
    frequencies: onlyOne("FREQUENCY", ofKind("FREQUENCY"), notes),
    sources: onlyOne("SOURCE", ofKind("SOURCE"), notes),
    flags: ofKind("FLAG"),
    data,
  };
}
