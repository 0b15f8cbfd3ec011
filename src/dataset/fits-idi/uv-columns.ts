/** Which columns of a UV_DATA table give which column of a row. */
import { MJD_EPOCH_JD } from "../../util/dates.ts";
import { type Column, findColumn } from "../fits/table-layout.ts";
import {
  dividedBy,
  isCoordinate,
  isInWavelengths,
  type RowColumns,
  type Sum,
  type WeightColumns,
} from "../fits-rows/columns.ts";
import type { RowStore } from "../fits-rows/plan.ts";
import type { Notes } from "../notes.ts";
import { holdsNumbers, pieceOf, sumOf } from "./stored-columns.ts";
import type { UvLayout } from "./uv-layout.ts";
import { WORDS } from "./words.ts";

/** What stands where. */
interface Found {
  readonly u: Column;
  readonly v: Column;
  readonly w: Column | undefined;
  readonly date: Column | undefined;
  readonly time: Column | undefined;
  readonly baseline: Column;
  readonly subarray: Column | undefined;
  readonly source: Column | undefined;
  readonly setup: Column | undefined;
  readonly integration: Column | undefined;
}

export interface UvColumns {
  readonly columns: RowColumns;
  readonly weights: WeightColumns;
  /** the weights stand in a column, or in the matrix */
  readonly hasWeights: boolean;
  readonly needs: RowStore["needs"];
}

/**
 * @param referenceFrequency Hz, for u, v, w that are stored in wavelengths
 * @param referenceDay MJD of RDATE, which stands in for a missing DATE; null: none is given
 * @throws InputError when u, v, the baseline or the time is missing, or the weights are of no known layout
 */
export function uvColumns(
  layout: UvLayout,
  referenceFrequency: number,
  referenceDay: number | null,
  notes: Notes,
): UvColumns {
  const found = findColumns(layout);
  const inSeconds = (column: Column) => coordinate(layout, column, referenceFrequency, notes);
  const maybe = (column: Column | undefined) => (column === undefined ? undefined : sumOf(column));
  const columns: RowColumns = {
    u: inSeconds(found.u),
    v: inSeconds(found.v),
    w: found.w === undefined ? undefined : inSeconds(found.w),
    time: timeOf(layout, found, referenceDay, notes),
    baseline: sumOf(found.baseline),
    antenna1: undefined,
    antenna2: undefined,
    subarray: maybe(found.subarray),
    integration: maybe(found.integration),
    source: maybe(found.source),
    setup: maybe(found.setup),
  };
  if (found.w === undefined) notes.fault("missing-w", "no column WW: w is taken as 0 and cannot be judged");
  const weight = layout.complex.length === 3 ? undefined : numbersIn(layout, "WEIGHT");
  const rowPieces = Object.values(found).flatMap((column) => (column === undefined ? [] : [pieceOf(column)]));
  const inMatrix = layout.complex.length === 3 || layout.flux.nullValue !== undefined;
  const weightPieces = [...(weight === undefined ? [] : [weight]), ...(inMatrix ? [layout.flux] : [])];
  return {
    columns,
    weights: weightsOf(layout, weight),
    hasWeights: layout.complex.length === 3 || weight !== undefined,
    needs: { rows: rowPieces, weights: [...rowPieces, ...weightPieces.map(pieceOf)] },
  };
}

/** A column of numbers by the first of `names` that the table has. */
function numbersIn({ table }: UvLayout, ...names: string[]): Column | undefined {
  const column = findColumn(table, ...names);
  return column !== undefined && holdsNumbers(column) ? column : undefined;
}

function findColumns(layout: UvLayout): Found {
  const { table, hdu } = layout;
  const required = (what: string, column: Column | undefined): Column => {
    if (column !== undefined) return column;
    const names = table.columns.slice(0, 30).map(({ name }) => name || "unnamed");
    throw hdu.header.error(`no column ${what} of numbers (found ${names.join(", ")})`, "TFIELDS");
  };
  const axis = (name: string) =>
    table.columns.find((column) => isCoordinate(column.name.toUpperCase(), name) && holdsNumbers(column));
  return {
    u: required("UU", axis("UU")),
    v: required("VV", axis("VV")),
    w: axis("WW"),
    date: numbersIn(layout, "DATE"),
    time: numbersIn(layout, "TIME"),
    baseline: required("BASELINE", numbersIn(layout, "BASELINE")),
    subarray: numbersIn(layout, "ARRAY"),
    source: numbersIn(layout, "SOURCE_ID", "SOURCE", "ID_NO."),
    setup: numbersIn(layout, "FREQID"),
    integration: numbersIn(layout, "INTTIM"),
  };
}

function coordinate(layout: UvLayout, column: Column, referenceFrequency: number, notes: Notes): Sum {
  const sum = sumOf(column);
  const unit = column.unit.toUpperCase();
  if (!isInWavelengths(column.name.toUpperCase())) {
    if (!/^(|S|SEC|SECONDS?)$/.test(unit)) {
      const text = `${layout.hdu.header.place.part}: the unit of ${column.name} is ${column.unit}: seconds are taken, as the format has it`;
      notes.fault("odd-uvw-unit", text);
    }
    return sum;
  }
  if (!(referenceFrequency > 0)) {
    throw layout.hdu.header.error(
      `${column.name} is in wavelengths, and there is no frequency to refer them to`,
      `TTYPE${column.index}`,
    );
  }
  return dividedBy(sum, referenceFrequency);
}

/** DATE is the Julian date of 0h, TIME days after it: whole days are taken off before the fraction is added. */
function timeOf(
  { hdu }: UvLayout,
  { date, time }: Pick<Found, "date" | "time">,
  referenceDay: number | null,
  notes: Notes,
): Sum {
  const part = hdu.header.place.part;
  if (date !== undefined) {
    const days = sumOf(date, -MJD_EPOCH_JD);
    if (time === undefined) {
      notes.note("missing-time-column", `${part}: no column TIME: the time is that of DATE alone`);
      return days;
    }
    const fraction = sumOf(time);
    return { constant: days.constant + fraction.constant, terms: [...days.terms, ...fraction.terms] };
  }
  if (time === undefined || referenceDay === null) {
    throw hdu.header.error(
      time === undefined
        ? "no columns DATE and TIME: expected the time of each row"
        : "no column DATE, and no RDATE in a header: expected the day that TIME counts from",
      "TFIELDS",
    );
  }
  notes.note("missing-date-column", `${part}: no column DATE: TIME is taken to count from RDATE`);
  return sumOf(time, referenceDay);
}

/** One weight a product and sub-band (product fastest), one a sub-band, or one a row: told by how many there are. */
function weightsOf(layout: UvLayout, column: Column | undefined): WeightColumns {
  const products = layout.stokes.length;
  const subbands = layout.subband.length;
  const none = { weights: [], subbandStep: 0, polarizationStep: 0, scale: undefined };
  if (column === undefined) return none;
  const count = column.repeat;
  const weights = Array.from({ length: count }, (_, k) => sumOf(column, 0, k));
  if (count === products * subbands) {
    return { weights, subbandStep: products, polarizationStep: 1, scale: undefined };
  }
  if (count === subbands) return { weights, subbandStep: 1, polarizationStep: 0, scale: undefined };
  if (count === 1) return { ...none, weights };
  throw layout.hdu.header.error(
    `column WEIGHT holds ${count} values a row: expected ${products * subbands} (${products} products of ${subbands} ` +
      `sub-bands), ${subbands} or 1`,
    `TFORM${column.index}`,
    `The ${WORDS.rows} of this file cannot be weighed`,
  );
}
