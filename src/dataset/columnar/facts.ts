/** The small tables of a dataset of columns: antennas, fields and what the map says of them. */
import type { Antenna, ArrayInfo, Field, PositionFrame } from "../dataset.ts";
import type { Notes } from "../notes.ts";
import type { AntennaConstant, ColumnMap, Constants } from "./column-map.ts";
import type { FoundLabels } from "./find-labels.ts";
import type { Label } from "./labels.ts";

/** Degrees of Greenwich sidereal time a day of UT1 (Aoki et al. 1982, A&A 105, 359). */
const DEGREES_PER_DAY = 360.98564736629;
/** What is farther than this from the origin is measured from the Earth's centre, metres. */
const EARTH_SIZED = 1e6;

export interface ResolvedAntennas {
  readonly array: ArrayInfo;
  readonly antennaOf: ReadonlyMap<Label, number>;
}

/**
 * @param table antennas of the map's constants or of the file it names; empty: none
 */
export function resolveAntennas(
  { constants }: ColumnMap,
  table: readonly AntennaConstant[],
  found: FoundLabels,
  notes: Notes,
): ResolvedAntennas {
  const labels = found.labels.get("antenna1")!.sorted();
  const antennas: Antenna[] = table.map((antenna) => ({ ...antenna }));
  const antennaOf = new Map<Label, number>();
  const strangers: Label[] = [];
  for (const label of labels) {
    const known = antennas.find(({ number, name }) =>
      typeof label === "number" ? number === label || name === String(label) : name === label,
    );
    if (known === undefined) strangers.push(label);
    else antennaOf.set(label, known.number);
  }
  addStrangers(strangers, antennas, antennaOf, constants.diameter ?? null);
  if (strangers.length > 0 && table.length > 0) {
    const text = `rows name antenna ${strangers.slice(0, 10).join(", ")}, which the table of antennas does not have`;
    notes.fault("antenna-not-in-table", text);
  }
  if (antennas.every(({ position }) => position === null)) {
    notes.note("missing-antenna-positions", "no antenna positions: geometry cannot be judged");
  }
  return { array: arrayOf(constants, antennas, table.length > 0), antennaOf };
}

/** Numbers stay themselves; names get the numbers after the last. */
function addStrangers(
  strangers: readonly Label[],
  antennas: Antenna[],
  antennaOf: Map<Label, number>,
  diameter: number | null,
): void {
  let next = antennas.reduce((most, { number }) => Math.max(most, number), 0) + 1;
  for (const label of strangers) {
    const usable = typeof label === "number" && Number.isInteger(label) && label >= 0 && label <= 65_535;
    const free = usable && !antennas.some(({ number }) => number === label);
    const number = free ? label : next;
    next = Math.max(next, number + 1);
    antennas.push({ number, name: String(label), position: null, diameter });
    antennaOf.set(label, number);
  }
}

function arrayOf(constants: Constants, antennas: readonly Antenna[], fromTable: boolean): ArrayInfo {
  return {
    name: constants.array ?? "",
    frame: frameOf(constants, antennas),
    antennas,
    fromTable,
    siderealTimeAtReference: constants.siderealTime ?? null,
    degreesPerDay: constants.degreesPerDay ?? DEGREES_PER_DAY,
    referenceDay: constants.referenceDay ?? null,
    ut1MinusUtc: constants.ut1MinusUtc ?? 0,
    timeSystem: "UTC",
  };
}

function frameOf({ frame }: Constants, antennas: readonly Antenna[]): PositionFrame {
  const distances = antennas
    .flatMap(({ position }) => (position === null ? [] : [Math.hypot(...position)]))
    .sort((a, b) => a - b);
  const median = distances[distances.length >> 1];
  if (median === undefined) return "unknown";
  return frame ?? (median > EARTH_SIZED ? "geocentric" : "local");
}

export interface ResolvedFields {
  readonly fields: readonly Field[];
  readonly fieldOf: ReadonlyMap<Label, number> | undefined;
  /** of rows where no column says */
  readonly onlyField: number;
}

export function resolveFields({ constants }: ColumnMap, found: FoundLabels, notes: Notes): ResolvedFields {
  const given = constants.fields ?? [];
  const labels = found.labels.get("field")?.sorted();
  if (labels === undefined) {
    const [only] = given;
    if (given.length > 1) {
      notes.fault(
        "missing-field-column",
        `the column map gives ${given.length} fields and no column says which a row is of: the first is taken for all`,
      );
    }
    const field = only ?? nameless(1, "");
    noteUnplaced([field], notes);
    return { fields: [field], fieldOf: undefined, onlyField: field.id };
  }
  const fields: Field[] = [...given];
  const fieldOf = new Map<Label, number>();
  for (const label of labels) {
    const known = given.find(({ id, name }) => (typeof label === "number" ? id === label : name === label));
    if (known !== undefined) {
      fieldOf.set(label, known.id);
      continue;
    }
    const taken = (id: number) => fields.some((field) => field.id === id);
    const usable = typeof label === "number" && Number.isInteger(label) && label >= 0 && !taken(label);
    const id = usable ? label : fields.reduce((most, field) => Math.max(most, field.id), 0) + 1;
    fields.push(nameless(id, usable ? `field ${label}` : String(label)));
    fieldOf.set(label, id);
  }
  noteUnplaced(fields, notes);
  return { fields, fieldOf, onlyField: 1 };
}

function nameless(id: number, name: string): Field {
  return { id, name, rightAscension: Number.NaN, declination: Number.NaN, equinox: Number.NaN };
}

function noteUnplaced(fields: readonly Field[], notes: Notes): void {
  const unplaced = fields.filter(({ rightAscension }) => Number.isNaN(rightAscension));
  if (unplaced.length === 0) return;
  const which =
    fields.length === 1
      ? ""
      : ` of field ${unplaced
          .slice(0, 10)
          .map(({ id }) => id)
          .join(", ")}`;
  notes.note("missing-phase-centre", `no phase centre${which}: geometry cannot be judged`);
}
