/**
 * From the station coordinates of an AN table to positions in a known frame. The convention leaves open whether they are
 * from the Earth's centre or from the array's, along axes to Greenwich or to the local meridian, right- or left-handed:
 * sizes tell the first, and where they do not suffice the u, v, w of some rows are asked which reading explains them.
 */
import { SPEED_OF_LIGHT } from "../../util/constants.ts";
import type { Field, PositionFrame } from "../dataset.ts";
import type { Notes } from "../notes.ts";
import type { ProbeRow } from "../row-summary.ts";
import type { AntennaTable, Position } from "./antenna-table.ts";

export interface FramedTable {
  readonly frame: PositionFrame;
  /** by antenna number, metres in `frame` */
  readonly positions: ReadonlyMap<number, Position>;
}

const DEGREE = Math.PI / 180;

/** The surface is 6357 to 6378 km from the centre; what is farther than this from the origin is geocentric. */
const EARTH_SIZED = 1e6;
/** A reading explains the u, v, w when it leaves less than this of them: above what old equinoxes leave (0.4 %). */
const EXPLAINED = 0.05;
/** ... and the others must leave more than this. */
const NOT_EXPLAINED = 0.2;

interface Reading {
  readonly text: string;
  readonly frame: PositionFrame;
  readonly place: (offset: Position) => Position;
}

/**
 * @param fields phase centres, for asking the rows
 * @param probe rows of any sub-array
 */
export function framePositions(
  table: AntennaTable,
  fields: readonly Field[],
  probe: readonly ProbeRow[],
  notes: Notes,
): FramedTable {
  const offsets = table.antennas.flatMap(({ offset }) => (offset === null ? [] : [offset]));
  if (offsets.length === 0) return { frame: "unknown", positions: new Map() };
  const readings = readingsOf(table, offsets, notes);
  const reading = choose(readings, table, fields, probe, notes);
  const positions = new Map<number, Position>();
  for (const { number, offset } of table.antennas) {
    if (offset === null) continue;
    // An empty entry is the Earth's centre: nobody's position.
    if (reading.frame === "geocentric" && length(reading.place(offset)) < EARTH_SIZED) continue;
    positions.set(number, reading.place(offset));
  }
  if (positions.size < offsets.length) {
    const text = `${table.part}: ${offsets.length - positions.size} antennas have no position (0, 0, 0)`;
    notes.fault("missing-antenna-positions", text);
  }
  return { frame: reading.frame, positions };
}

/** The readings that the sizes leave open, the likeliest first. */
function readingsOf(table: AntennaTable, offsets: readonly Position[], notes: Notes): Reading[] {
  const { origin, hand, part } = table;
  const size = median(offsets.map(length));
  const away = length(origin);
  const keep = (offset: Position) => offset;
  let readings: Reading[];
  if (size > EARTH_SIZED) {
    if (away > EARTH_SIZED) {
      const text = `${part}: ARRAYX, ARRAYY, ARRAYZ are left out, since STABXYZ are from the Earth's centre already`;
      notes.note("array-position-odd", text);
    }
    readings = [{ text: "positions from the Earth's centre", frame: "geocentric", place: keep }];
  } else if (away < EARTH_SIZED) {
    readings = [{ text: "local positions", frame: "local", place: keep }];
  } else {
    const parallel: Reading = {
      text: "offsets along geocentric axes",
      frame: "geocentric",
      place: (offset) => add(origin, offset),
    };
    const local: Reading = {
      text: "offsets along axes to the local meridian",
      frame: "geocentric",
      place: (offset) => add(origin, turned(offset, Math.atan2(origin[1], origin[0]))),
    };
    readings = table.frame === "ITRF" || table.frame === "GEOCENTRIC" ? [parallel, local] : [local, parallel];
  }
  const mirrored = readings.map((reading): Reading => {
    const place = (offset: Position) => reading.place([offset[0], -offset[1], offset[2]]);
    return { text: `${reading.text}, left-handed`, frame: reading.frame, place };
  });
  // Without a word about the hand the right one is meant, unless the rows say otherwise.
  return hand.startsWith("L") ? [...mirrored, ...readings] : [...readings, ...mirrored];
}

function choose(
  readings: readonly Reading[],
  table: AntennaTable,
  fields: readonly Field[],
  probe: readonly ProbeRow[],
  notes: Notes,
): Reading {
  const expected = readings[0]!;
  const left = readings.map((reading) => unexplained(reading, table, fields, probe));
  const best = left.indexOf(Math.min(...left));
  // NaN (nothing to ask) fails every comparison, and the expected reading stands.
  const decided = left[best]! < EXPLAINED && left[0]! > NOT_EXPLAINED;
  const chosen = decided ? readings[best]! : expected;
  if (chosen !== expected) {
    const text = `${table.part}: antenna positions are read as ${chosen.text}, which explains u, v, w`;
    notes.note("position-frame-from-uvw", text);
  } else if (table.hand.startsWith("L")) {
    const text = `${table.part}: antenna positions are left-handed (XYZHAND); y is turned around`;
    notes.note("left-handed-positions", text);
  }
  return chosen;
}

/**
 * Share of the u, v, w that a reading does not explain: rms of |computed| - |stored| over the rms of stored. Blind to
 * signs on purpose: a flipped axis or antenna order is for the geometry rules to find, not to be explained away here.
 * NaN where sidereal time, phase centre or positions are missing.
 */
function unexplained(
  reading: Reading,
  table: AntennaTable,
  fields: readonly Field[],
  probe: readonly ProbeRow[],
): number {
  const { siderealTime, referenceDay } = table;
  if (siderealTime === null || referenceDay === null || reading.frame !== "geocentric") return Number.NaN;
  const degreesPerDay = table.degreesPerDay ?? 360.98564736629;
  const offsets = new Map(table.antennas.map(({ number, offset }) => [number, offset]));
  const centres = new Map(fields.map((field) => [field.id, field]));
  let difference = 0;
  let power = 0;
  for (const row of probe) {
    const one = offsets.get(row.antenna1);
    const two = offsets.get(row.antenna2);
    const centre = centres.get(row.field);
    if (!one || !two || centre === undefined || row.subarray !== table.subarray) continue;
    const days = row.time + table.timeOffset - referenceDay;
    const hourAngle = (siderealTime + degreesPerDay * days) * DEGREE - centre.rightAscension;
    const computed = uvw(subtract(reading.place(one), reading.place(two)), hourAngle, centre.declination);
    const stored = [row.u, row.v, row.w];
    for (let axis = 0; axis < 3; axis++) {
      // An axis that was never filled in says nothing.
      if (stored[axis] === 0) continue;
      const metres = Math.abs(stored[axis]! * SPEED_OF_LIGHT);
      difference += (Math.abs(computed[axis]!) - metres) ** 2;
      power += metres ** 2;
    }
  }
  return power > 0 ? Math.sqrt(difference / power) : Number.NaN;
}

/** u, v, w of a geocentric baseline, metres (Thompson, Moran & Swenson 2017, eq. 4.1). */
function uvw([x, y, z]: Position, hourAngle: number, declination: number): Position {
  const [sinH, cosH] = [Math.sin(hourAngle), Math.cos(hourAngle)];
  const [sinD, cosD] = [Math.sin(declination), Math.cos(declination)];
  return [
    sinH * x + cosH * y,
    -sinD * cosH * x + sinD * sinH * y + cosD * z,
    cosD * cosH * x - cosD * sinH * y + sinD * z,
  ];
}

/** From axes to the meridian at `longitude` to axes to Greenwich. */
function turned([x, y, z]: Position, longitude: number): Position {
  const [sin, cos] = [Math.sin(longitude), Math.cos(longitude)];
  return [x * cos - y * sin, x * sin + y * cos, z];
}

function add(a: Position, b: Position): Position {
  return [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
}

function subtract(a: Position, b: Position): Position {
  return [a[0] - b[0], a[1] - b[1], a[2] - b[2]];
}

function length(a: Position): number {
  return Math.hypot(...a);
}

function median(values: readonly number[]): number {
  const sorted = [...values].sort((a, b) => a - b);
  return sorted[sorted.length >> 1]!;
}
