/** A column map as the YAML that `map-file.ts` reads, every number to its last digit. */
import { stat } from "node:fs/promises";
import { Document, isSeq, visit, YAMLMap } from "yaml";
import { dateFromMjd } from "../../util/dates.ts";
import { InputError } from "../../util/errors.ts";
import { writeTextFile } from "../../util/write-file.ts";
import { type ColumnMap, type ColumnUse, type Constants, ROLES, type SetupConstant } from "./column-map.ts";

/** Text that ends in a line end. */
export function columnMapText({ uses, lists, constants }: ColumnMap): string {
  const columns = ROLES.flatMap((role) => {
    const use = uses[role];
    return use === undefined ? [] : [[role, useText(use)] as const];
  });
  const document = new Document({
    columns: Object.fromEntries(columns),
    ...(lists.length === 0 ? {} : { lists }),
    constants: constantsText(constants),
  });
  // Rows of numbers and small maps on a line each.
  visit(document, {
    Collection(_, node) {
      if (isSeq(node) || node instanceof YAMLMap) {
        const flat = node.items.every((item) => !hasCollection(item));
        if (flat && node !== document.get("columns") && node !== document.get("constants")) node.flow = true;
      }
    },
  });
  return document.toString({ lineWidth: 0 });
}

function hasCollection(item: unknown): boolean {
  if (typeof item !== "object" || item === null) return false;
  if ("items" in item) return true;
  return "value" in item && hasCollection(item.value);
}

/**
 * @throws InputError when the file is there already or cannot be written
 */
export async function writeColumnMap(map: ColumnMap, path: string): Promise<void> {
  const there = await stat(path).then(
    () => true,
    () => false,
  );
  if (there) {
    throw new InputError("the file exists already", { file: path }, "Choose another name or move it away");
  }
  await writeTextFile(path, columnMapText(map));
}

function useText({ column, unit, since, from, single }: ColumnUse): string | object {
  const more = given({ unit, since, from, precision: single === true ? "single" : undefined });
  return Object.keys(more).length === 0 ? column : { column, ...more };
}

function constantsText(constants: Constants): object {
  const { setups, fields, antennas } = constants;
  const [first, second] = setups ?? [];
  const plain = second === undefined && (first === undefined || first.id === 1);
  return given({
    array: constants.array,
    unit: constants.unit,
    polarizations: constants.polarizations,
    ...(plain ? (first === undefined ? { channel_width: constants.channelWidth } : setupText(first)) : {}),
    setups: plain ? undefined : setups?.map((setup) => ({ id: setup.id, ...setupText(setup) })),
    reference_frequency: constants.referenceFrequency,
    integration: constants.integration,
    fields: fields?.map(({ id, name, rightAscension, declination, equinox }) =>
      given({
        id,
        name,
        ra: radians(rightAscension),
        dec: radians(declination),
        equinox: Number.isNaN(equinox) ? undefined : equinox,
      }),
    ),
    antenna_positions: constants.antennaFile,
    dish_diameter: constants.diameter,
    frame: constants.frame === "unknown" ? undefined : constants.frame,
    reference_date: constants.referenceDay === undefined ? undefined : dayText(constants.referenceDay),
    sidereal_time: constants.siderealTime,
    degrees_per_day: constants.degreesPerDay,
    ut1_minus_utc: constants.ut1MinusUtc,
    header: constants.header,
    antennas: antennas?.map(({ number, name, position, diameter }) =>
      given({ number, name, position: position ?? undefined, diameter: diameter ?? undefined }),
    ),
  });
}

function setupText({ frequencies, channelWidths }: SetupConstant): object {
  return given({ frequencies, channel_width: channelWidths });
}

function dayText(mjd: number): string | number {
  return Number.isInteger(mjd) ? dateFromMjd(mjd) : mjd;
}

function radians(value: number): string | undefined {
  return Number.isNaN(value) ? undefined : `${value}rad`;
}

function given(entries: Readonly<Record<string, unknown>>): Record<string, unknown> {
  return Object.fromEntries(Object.entries(entries).filter(([, value]) => value !== undefined));
}
