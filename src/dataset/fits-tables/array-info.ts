/** The antenna tables of all sub-arrays as one array. */
import type { Antenna, ArrayInfo, Field } from "../dataset.ts";
import type { Notes } from "../notes.ts";
import type { RowSummary } from "../row-summary.ts";
import type { AntennaTable } from "./antenna-table.ts";
import { type FramedTable, framePositions } from "./frames.ts";
import type { Words } from "./words.ts";

/** Degrees of Greenwich sidereal time a day of UT1 (Aoki et al. 1982, A&A 105, 359). */
const DEGREES_PER_DAY = 360.98564736629;

export function arrayInfo(
  tables: readonly AntennaTable[],
  fields: readonly Field[],
  summary: RowSummary,
  telescope: string,
  words: Words,
  notes: Notes,
): ArrayInfo {
  const [first] = tables;
  if (first === undefined) return withoutTable(summary, telescope, words, notes);
  const framed = tables.map((table) => framePositions(table, fields, summary.probe, notes));
  const frame = framed.find(({ frame }) => frame !== "unknown")?.frame ?? "unknown";
  const antennas = merged(tables, framed, frame, notes);
  noteStrangers(antennas, summary, notes);
  return {
    name: first.arrayName === "" ? telescope : first.arrayName,
    frame,
    antennas,
    fromTable: true,
    siderealTimeAtReference: siderealTimeAtUtc(first),
    degreesPerDay: first.degreesPerDay ?? DEGREES_PER_DAY,
    referenceDay: first.referenceDay,
    ut1MinusUtc: first.ut1MinusUtc,
    timeSystem: first.timeSystem,
  };
}

/** GSTIA0 belongs to 0h in the file's time system; the rows' times are UTC. */
function siderealTimeAtUtc(table: AntennaTable): number | null {
  if (table.siderealTime === null) return null;
  return table.siderealTime + (table.degreesPerDay ?? DEGREES_PER_DAY) * table.timeOffset;
}

function withoutTable(summary: RowSummary, telescope: string, words: Words, notes: Notes): ArrayInfo {
  const text = `no ${words.antennaTable}: antennas are called by their numbers, and geometry cannot be judged`;
  notes.note("missing-antenna-table", text);
  return {
    name: telescope,
    frame: "unknown",
    antennas: summary.antennas.map((number) => nameless(number)),
    fromTable: false,
    siderealTimeAtReference: null,
    degreesPerDay: DEGREES_PER_DAY,
    referenceDay: null,
    ut1MinusUtc: 0,
    timeSystem: "UTC",
  };
}

function nameless(number: number): Antenna {
  return { number, name: String(number), position: null, diameter: null };
}

/** Antennas of later sub-arrays join: tables whose numbers are distinct (`distinctNumbers`) disagree in a place at most. */
function merged(
  tables: readonly AntennaTable[],
  framed: readonly FramedTable[],
  frame: ArrayInfo["frame"],
  notes: Notes,
): Antenna[] {
  const antennas = new Map<number, Antenna>();
  const disagreeing = new Set<number>();
  tables.forEach((table, t) => {
    const { positions, frame: ownFrame } = framed[t]!;
    for (const { number, name, diameter } of table.antennas) {
      const position = (ownFrame === frame ? positions.get(number) : undefined) ?? null;
      const earlier = antennas.get(number);
      if (earlier === undefined) antennas.set(number, { number, name, position, diameter });
      else if (!sameAntenna(earlier, name, position)) disagreeing.add(number);
    }
    if (ownFrame !== frame && ownFrame !== "unknown") {
      const text = `${table.part}: positions are ${ownFrame}, those of the first sub-array ${frame}; they are left out`;
      notes.fault("position-frames-differ", text);
    }
  });
  if (disagreeing.size > 0) {
    const text =
      `the antenna tables of the sub-arrays differ on antenna ${[...disagreeing].slice(0, 10).join(", ")}: ` +
      "the first table counts, and the geometry of the others cannot be judged";
    notes.fault("subarrays-disagree", text);
  }
  return [...antennas.values()];
}

function sameAntenna(one: Antenna, name: string, position: Antenna["position"]): boolean {
  if (one.name !== name) return false;
  if (one.position === null || position === null) return true;
  const [x, y, z] = one.position;
  return Math.hypot(x - position[0], y - position[1], z - position[2]) < 1;
}

function noteStrangers(antennas: Antenna[], summary: RowSummary, notes: Notes): void {
  const known = new Set(antennas.map(({ number }) => number));
  const strangers = summary.antennas.filter((number) => !known.has(number));
  if (strangers.length === 0) return;
  antennas.push(...strangers.map((number) => nameless(number)));
  const text = `rows name antenna ${strangers.slice(0, 10).join(", ")}, which the antenna table does not have`;
  notes.fault("antenna-not-in-table", text);
}
