/** Antennas from a CSV file of their own: name or number, x, y, z in metres, and a diameter where there is one. */
import { parse } from "csv-parse/sync";
import { InputError } from "../../util/errors.ts";
import { readSmallText } from "../../util/small-text.ts";
import type { AntennaConstant } from "./column-map.ts";
import { delimiterOf } from "./delimiter.ts";

const MOST_ANTENNAS = 65_536;

/** @throws InputError with the row that is wrong */
export async function readAntennaFile(
  path: string,
  diameter: number | undefined,
): Promise<AntennaConstant[]> {
  const text = await readSmallText(path, "table of antennas");
  let records: string[][];
  try {
    const delimiter = delimiterOf(text.split(/\r?\n/, 1)[0]!) ?? ",";
    records = parse(text, { bom: true, delimiter, comment: "#", skip_empty_lines: true, trim: true });
  } catch (cause) {
    throw new InputError(`this is not CSV: ${(cause as Error).message}`, { file: path }, undefined, {
      cause,
    });
  }
  const [header = [], ...rows] = records;
  const at = (...names: string[]) => header.findIndex((name) => names.includes(name.toLowerCase()));
  const [x, y, z] = [at("x", "x_m"), at("y", "y_m"), at("z", "z_m")];
  const [number, name] = [at("number", "antenna", "id"), at("name", "station")];
  const size = at("diameter", "diameter_m", "dish_diameter");
  if (Math.min(x, y, z) < 0 || Math.max(number, name) < 0) {
    throw new InputError(
      `a table of antennas needs the columns number or name, x, y and z: found ${header.slice(0, 20).join(", ")}`,
      { file: path, line: 1 },
    );
  }
  if (rows.length > MOST_ANTENNAS) {
    throw new InputError(`there are ${rows.length} antennas: expected at most ${MOST_ANTENNAS}`, {
      file: path,
    });
  }
  return rows.map((row, i) => {
    const metres = (column: number) => {
      const value = Number(row[column]);
      if (row[column] !== "" && Number.isFinite(value)) return value;
      throw new InputError(`"${row[column]}" is not a number of metres`, { file: path, row: i + 1 });
    };
    const id = number < 0 ? i + 1 : Number(row[number]);
    if (!Number.isInteger(id) || id < 0 || id > 65_535) {
      throw new InputError(`"${row[number]}" is no antenna number`, { file: path, row: i + 1 });
    }
    return {
      number: id,
      name: name < 0 ? String(id) : row[name]!,
      position: [metres(x), metres(y), metres(z)],
      diameter: size < 0 || row[size] === "" ? (diameter ?? null) : metres(size),
    };
  });
}
