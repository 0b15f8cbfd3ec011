/** Fields: the source table, or the one field that a header names. */
import type { Field } from "../dataset.ts";
import type { Cursor } from "../fits/byte-source.ts";
import type { Hdu } from "../fits/hdus.ts";
import type { Header } from "../fits/header.ts";
import { findColumn, requireColumn, tableLayout } from "../fits/table-layout.ts";
import { readTable } from "../fits/table-rows.ts";
import type { Notes } from "../notes.ts";
import type { RowSummary } from "../row-summary.ts";
import { axisValue, type NamedAxes } from "./axes.ts";
import { lastWord } from "./last-word.ts";
import type { Words } from "./words.ts";

const DEGREE = Math.PI / 180;
const MOST_FIELDS = 65_536;

/**
 * @param equinoxOtherwise of fields whose own the table does not give
 * @throws InputError when the table is malformed
 */
export async function readFieldTable(
  cursor: Cursor,
  hdu: Hdu,
  notes: Notes,
  equinoxOtherwise = Number.NaN,
): Promise<Field[]> {
  const layout = tableLayout(hdu);
  if (layout.rows > MOST_FIELDS) {
    throw hdu.header.error(
      `the ${lastWord(hdu)} table has ${layout.rows} rows: expected at most ${MOST_FIELDS}`,
      "NAXIS2",
    );
  }
  const table = await readTable(cursor, layout);
  const id = requireColumn(layout, "ID. NO.", "SOURCE_ID", "ID_NO.", "ID.NO.", "ID NO");
  const name = findColumn(layout, "SOURCE");
  const right = findColumn(layout, "RAEPO");
  const declination = findColumn(layout, "DECEPO");
  const epoch = findColumn(layout, "EPOCH", "EQUINOX");
  const fields = new Map<number, Field>();
  for (let row = 0; row < table.rows; row++) {
    const number = table.number(row, id);
    if (!Number.isInteger(number) || number < 0 || number > 2 ** 31 - 1) {
      throw hdu.header.error(`row ${row + 1}: ${id.name} is ${number}: expected a whole number of 0 or more`);
    }
    if (fields.has(number)) {
      const text = `the source table has source ${number} more than once: the first counts`;
      notes.fault("field-twice", text);
      continue;
    }
    const text = name === undefined ? "" : table.text(row, name);
    fields.set(number, {
      id: number,
      name: text === "" ? `source ${number}` : text,
      rightAscension: right === undefined ? Number.NaN : table.number(row, right) * DEGREE,
      declination: declination === undefined ? Number.NaN : table.number(row, declination) * DEGREE,
      equinox:
        epoch === undefined ? equinoxOtherwise : yearOf(table.text(row, epoch) || table.number(row, epoch)),
    });
  }
  return [...fields.values()];
}

/**
 * The fields of the rows: those of the table, the header's where there is none, and nameless ones for numbers that
 * neither knows.
 *
 * @param centre the header that names a field, and its axes
 * @param named rows say which field they are of
 */
export function fieldsOfRows(
  centre: Centre,
  named: boolean,
  table: readonly Field[] | undefined,
  summary: RowSummary,
  words: Words,
  notes: Notes,
): Field[] {
  const met = summary.fields.map(({ id }) => id);
  if (table === undefined && met.length === 1) {
    if (named) notes.note("missing-source-table", `no ${words.sourceTable}: the field is that of the header`);
    return [fieldOfHeader(centre, met[0]!, notes)];
  }
  if (table === undefined) {
    notes.note(
      "missing-source-table",
      `no ${words.sourceTable}: the ${met.length} fields of the rows have no names, nor phase centres`,
    );
  } else if (!named && table.length !== 1) {
    notes.note(
      "missing-source-parameter",
      `the source table has ${table.length} rows and the ${words.rows} no ${words.sourceColumn}: the field is that of the header`,
    );
    return [fieldOfHeader(centre, met[0]!, notes)];
  }
  const fields = [...(table ?? [])];
  const known = new Set(fields.map(({ id }) => id));
  const strangers = met.filter((id) => !known.has(id));
  for (const id of strangers) {
    const unknown = Number.NaN;
    fields.push({
      id,
      name: `source ${id}`,
      rightAscension: unknown,
      declination: unknown,
      equinox: unknown,
    });
  }
  if (table !== undefined && strangers.length > 0) {
    const ids = strangers.slice(0, 10).join(", ");
    notes.fault("field-not-in-table", `rows name source ${ids}, which the source table does not have`);
  }
  return fields;
}

/** What names the one field of a file without a source table. */
export interface Centre extends Pick<NamedAxes, "rightAscension" | "declination"> {
  readonly header: Header;
}

/** OBJECT at the RA and DEC axes, or where the antennas pointed. */
function fieldOfHeader({ header, rightAscension, declination }: Centre, id: number, notes: Notes): Field {
  const name = (header.shown("OBJECT") ?? "").trim();
  const missing = rightAscension === undefined || declination === undefined;
  if (missing) {
    const pointing = header.looseNumber("OBSRA") !== undefined && header.looseNumber("OBSDEC") !== undefined;
    const text = pointing
      ? "no RA and DEC axes: the phase centre is taken from OBSRA and OBSDEC"
      : "no RA and DEC axes: the phase centre is unknown";
    notes.note("missing-phase-centre", text);
  }
  const axisDegrees = (axis: typeof rightAscension) => (axis === undefined ? Number.NaN : axisValue(axis, 0));
  return {
    id,
    name: name === "" ? `source ${id}` : name,
    rightAscension:
      DEGREE * (missing ? (header.looseNumber("OBSRA") ?? Number.NaN) : axisDegrees(rightAscension)),
    declination: DEGREE * (missing ? (header.looseNumber("OBSDEC") ?? Number.NaN) : axisDegrees(declination)),
    equinox: headerEquinox(header),
  };
}

/** EQUINOX, or EPOCH as its older name, number or text; else what RADESYS implies (FITS Standard 4.0, section 8.3). */
export function headerEquinox(header: Header): number {
  const written = header.shown("EQUINOX") ?? header.shown("EPOCH");
  if (written !== undefined) return yearOf(written);
  const system = (header.shown("RADESYS") ?? header.shown("RADECSYS") ?? "").trim().toUpperCase();
  if (system.startsWith("FK4")) return 1950;
  return system === "FK5" || system === "ICRS" ? 2000 : Number.NaN;
}

/** 2000, "2000.0", "J2000", "B1950.0"; NaN for 0 and for anything else. */
export function yearOf(written: number | string): number {
  const match = /^\s*[JB]?\s*(\d+(?:\.\d*)?)\s*$/i.exec(String(written));
  const year = match === null ? Number.NaN : Number(match[1]);
  return year === 0 ? Number.NaN : year;
}

/** Centres and equinoxes that the format allows and the sky does not have. */
export function noteImpossibleFields(fields: readonly Field[], notes: Notes): void {
  for (const { id, rightAscension, declination, equinox } of fields.slice(0, 100)) {
    const where = `source ${id}`;
    if (Math.abs(declination) > Math.PI / 2 + 1e-9 || Math.abs(rightAscension) > 2 * Math.PI + 1e-9) {
      const text =
        `${where}: the phase centre is ${rightAscension / DEGREE}, ${declination / DEGREE} deg: ` +
        "expected 0 to 360 and -90 to 90";
      notes.fault("impossible-phase-centre", text);
    }
    if (equinox < 1800 || equinox > 2200) {
      const text = `${where}: the equinox is ${equinox}: expected a year such as 2000 or 1950`;
      notes.fault("impossible-epoch", text);
    }
  }
}
