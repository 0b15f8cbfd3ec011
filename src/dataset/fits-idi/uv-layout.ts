/**
 * What the header of a UV_DATA table says of a row: its columns, and the axes of the matrix in one of them. The matrix
 * in a table is the MAXIS convention of 1989 (NASA's User's Guide for FITS, appendix on single-dish data).
 */
import type { Hdu } from "../fits/hdus.ts";
import type { Header } from "../fits/header.ts";
import { type Column, findColumn, type TableLayout, tableLayout } from "../fits/table-layout.ts";
import { type ArrayAxis, type NamedAxes, nameAxes, readAxes } from "../fits-tables/axes.ts";
import type { Notes } from "../notes.ts";
import { bitpixOfCode } from "./stored-columns.ts";
import { WORDS } from "./words.ts";

/** Largest row read, bytes. Rows are converted whole; the largest correlators stay well below. */
const MOST_ROW_BYTES = 512 * 1024 * 1024;
const MOST_MATRIX_AXES = 99;

export interface UvLayout extends NamedAxes {
  readonly hdu: Hdu;
  readonly table: TableLayout;
  /** the column that holds the matrix */
  readonly flux: Column;
  /** of the elements of the matrix */
  readonly bitpix: number;
}

/** @throws InputError naming the keyword for every header that is not that of a table of visibilities */
export function uvLayout(hdu: Hdu, notes: Notes): UvLayout {
  const { header } = hdu;
  const table = tableLayout(hdu);
  if (table.rowBytes > MOST_ROW_BYTES) {
    throw header.error(
      `a row takes ${table.rowBytes} bytes: expected at most ${MOST_ROW_BYTES}`,
      "NAXIS1",
      "Split the file by sub-band or channel",
    );
  }
  const flux = matrixColumn(table);
  const bitpix = bitpixOfCode(flux.code);
  if (bitpix === undefined || flux.variable !== undefined) {
    throw header.error(
      `TFORM${flux.index} is ${header.shown(`TFORM${flux.index}`)}: expected a matrix of numbers (B I J K E D)`,
      `TFORM${flux.index}`,
    );
  }
  const axes = matrixAxes(header);
  const elements = axes.reduce((product, { length }) => product * length, 1);
  if (elements !== flux.repeat) {
    throw header.error(
      `the matrix axes (${axes.map(({ length }) => length).join(" x ")}) make ${elements} elements, column ${flux.name} ` +
        `holds ${flux.repeat}: expected the same`,
      "MAXIS",
    );
  }
  if (elements === 0) throw header.error("an axis of the matrix has length 0: expected 1 or more", "MAXIS");
  return { hdu, table, flux, bitpix, ...nameAxes(header, axes, WORDS, notes) };
}

/** The one marked by TMATXn; without a mark that called FLUX. */
function matrixColumn(table: TableLayout): Column {
  const { header } = table.hdu;
  const marked = table.columns.find(({ index }) => header.shown(`TMATX${index}`) === "T");
  const flux = marked ?? findColumn(table, "FLUX");
  if (flux !== undefined) return flux;
  const found = table.columns.slice(0, 30).map(({ name }) => name || "unnamed");
  throw header.error(
    `no column holds the matrix (found ${found.join(", ")}): expected one marked by TMATXn = T, or called FLUX`,
    "TFIELDS",
  );
}

function matrixAxes(header: Header): ArrayAxis[] {
  const matrices = header.integer("NMATRIX", 0) ?? 1;
  if (matrices !== 1) throw header.error(`NMATRIX is ${matrices}: expected one matrix a row`, "NMATRIX");
  const count = header.requiredInteger("MAXIS", 1, MOST_MATRIX_AXES);
  const lengths = Array.from({ length: count }, (_, i) => {
    const lengthKey = `MAXIS${i + 1}`;
    return { number: i + 1, lengthKey, length: header.requiredInteger(lengthKey, 0) };
  });
  const axes = readAxes(header, lengths).map((axis) => withTableKeywords(header, axis));
  const first = header.looseNumber("STK_1");
  if (first === undefined || axes.some(({ type }) => type === "STOKES")) return axes;
  // One product needs no axis: the keyword names it.
  return [...axes, { ...ONE, type: "STOKES", value: first, step: Math.sign(first) }];
}

const ONE: ArrayAxis = {
  number: 0,
  lengthKey: "STK_1",
  type: "",
  length: 1,
  stride: 0,
  value: 1,
  step: 1,
  pixel: 1,
};

/** What an axis leaves out may stand in the keywords that every table of the format carries. */
function withTableKeywords(header: Header, axis: ArrayAxis): ArrayAxis {
  const said = (part: string) => header.has(`${part}${axis.number}`);
  const other = (part: string, keyword: string, value: number) =>
    said(part) ? value : (header.looseNumber(keyword) ?? value);
  if (axis.type === "STOKES") {
    const value = other("CRVAL", "STK_1", axis.value);
    return { ...axis, value, step: said("CDELT") ? axis.step : Math.sign(value) };
  }
  if (axis.type !== "FREQ") return axis;
  return {
    ...axis,
    value: other("CRVAL", "REF_FREQ", said("CRVAL") ? axis.value : Number.NaN),
    step: other("CDELT", "CHAN_BW", axis.step),
    pixel: other("CRPIX", "REF_PIXL", axis.pixel),
  };
}
