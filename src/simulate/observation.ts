/**
 * A scenario worked out into tables: antennas, baselines, integrations, channels, products. Everything a row needs is
 * found here by its integration and baseline, so that rows can be made in any order.
 */

import type { ArrayInfo, Field, Polarization, Setup, Shape } from "../dataset/dataset.ts";
import { enuToLocal, geodeticToGeocentric, localToGeocentric, type Vector3 } from "../geometry/earth.ts";
import { greenwichSiderealTime, SIDEREAL_DEGREES_PER_DAY, siderealTimeOf } from "../geometry/sidereal.ts";
import { hourAngle } from "../geometry/uvw.ts";
import { SECONDS_PER_DAY } from "../util/constants.ts";
import { mjdFromDate } from "../util/dates.ts";
import { InputError } from "../util/errors.ts";
import type { FaultOf } from "./faults/schema.ts";
import { antennaOffsets } from "./layout.ts";
import { handsOf, type Product, productsOf } from "./products.ts";
import type { Scenario } from "./scenario.ts";

/** One station as it is and as the tables and the correlator believe it to be. */
export interface Station {
  readonly number: number;
  readonly sefd: number;
  /** metres from the array's centre, geocentric orientation: true, behind the written u, v, w, and tracked */
  readonly actual: Vector3;
  readonly forUvw: Vector3;
  readonly tracked: Vector3;
}

export interface Observation {
  readonly scenario: Scenario;
  /** as the file tells it */
  readonly array: ArrayInfo;
  readonly stations: readonly Station[];
  readonly fields: readonly Field[];
  readonly setup: Setup;
  readonly polarizations: readonly Polarization[];
  readonly products: readonly Product[];
  readonly shape: Shape;
  /** subbands x channels, and those times polarizations */
  readonly channels: number;
  readonly rowSamples: number;
  /** (baselines) index into stations; the first has the lower place in the table */
  readonly first: Int32Array;
  readonly second: Int32Array;
  readonly baselines: number;
  /** (integrations) MJD (UTC) of the centre, index into fields, Greenwich hour angle of the phase centre in radians */
  readonly times: Float64Array;
  readonly fieldAt: Int32Array;
  readonly hourAngleAt: Float64Array;
  /** MJD of the start of the first integration */
  readonly start: number;
  /** seconds */
  readonly integration: number;
  /** Hz: middle of the band, and the step from channel to channel */
  readonly bandCentre: number;
  readonly channelStep: number;
}

/**
 * Times lie on this grid, 2^-30 day = 80 microseconds: on it a Julian date, its two float32 parts and an MJD are all
 * exact, so a written file gives back the same times bit for bit.
 */
const TIME_GRID = 2 ** -30;

/** @throws InputError where the scenario contradicts itself */
export function observe(scenario: Scenario): Observation {
  const start = startOf(scenario);
  const referenceDay = Math.floor(start);
  const { array, stations } = arrayOf(scenario, referenceDay);
  const { times, fieldAt } = timesOf(scenario, start);
  const fields = scenario.fields.map(
    (field, i): Field => ({
      id: i + 1,
      name: field.name,
      rightAscension: field.ra,
      declination: field.dec,
      equinox: 2000,
    }),
  );
  const hourAngleAt = times.map((mjd, t) =>
    hourAngle(siderealTimeOf(array, mjd), fields[fieldAt[t]!]!.rightAscension),
  );
  const { first, second } = pairsOf(stations.length, scenario.autocorrelations);
  const { setup, channelStep, bandCentre } = setupOf(scenario);
  const channels = scenario.frequency.subbands * scenario.frequency.channels;
  const polarizations = scenario.polarizations;
  requireKnownHands(scenario);
  requireKnownFields(scenario);
  requireModestSize(scenario, stations.length, times.length);
  return {
    scenario,
    array,
    stations,
    fields,
    setup,
    polarizations,
    products: productsOf(polarizations),
    shape: {
      subbands: scenario.frequency.subbands,
      channels: scenario.frequency.channels,
      polarizations: polarizations.length,
    },
    channels,
    rowSamples: channels * polarizations.length,
    first,
    second,
    baselines: first.length,
    times,
    fieldAt,
    hourAngleAt,
    start,
    integration: Math.fround(scenario.time.integration),
    bandCentre,
    channelStep,
  };
}

function startOf({ time }: Scenario): number {
  const start = mjdFromDate(time.start);
  if (Number.isFinite(start)) return start;
  throw new InputError(
    `"${time.start}" is not a date and time`,
    { part: "scenario, time.start" },
    "Write it as 2026-03-01T02:00:00, UTC",
  );
}

function arrayOf(scenario: Scenario, referenceDay: number): { array: ArrayInfo; stations: Station[] } {
  const { array } = scenario;
  const level = antennaOffsets(array.layout, scenario.seed);
  const numbers = array.numbers ?? level.map((_, i) => i + 1);
  const offsets = level.map(([east, north, up], i): Vector3 => {
    return [east, north, up + (array.heights[String(numbers[i])] ?? 0)];
  });
  for (const key of ["sefds", "heights"] as const) {
    const stranger = Object.keys(array[key]).find((number) => !numbers.includes(Number(number)));
    if (stranger === undefined) continue;
    throw new InputError(`there is no antenna ${stranger}`, { part: `scenario, array.${key}.${stranger}` });
  }
  if (numbers.length !== offsets.length || new Set(numbers).size !== numbers.length) {
    throw new InputError(
      `${numbers.length} antenna numbers for ${offsets.length} antennas: expected one each`,
      {
        part: "scenario, array.numbers",
      },
    );
  }
  const misplaced = new Map<number, FaultOf<"antenna-position">>();
  for (const fault of scenario.faults) {
    if (fault.kind === "antenna-position") misplaced.set(fault.antenna, fault);
  }
  const centre = geodeticToGeocentric(array);
  const stations: Station[] = [];
  const antennas: ArrayInfo["antennas"][number][] = [];
  offsets.forEach((offset, i) => {
    const number = numbers[i]!;
    const fault = misplaced.get(number);
    const moved = fault === undefined ? offset : add(offset, fault.offset);
    const oriented = (enu: Vector3): Vector3 =>
      localToGeocentric(enuToLocal(enu, array.latitude), array.longitude);
    const actual = oriented(offset);
    const wrong = oriented(moved);
    stations.push({
      number,
      sefd: array.sefds[String(number)] ?? array.sefd,
      actual,
      forUvw: fault?.of === "table" ? actual : wrong,
      tracked: fault?.of === "model" ? wrong : actual,
    });
    const tabled = fault?.of === "uvw" ? offset : moved;
    antennas.push({
      number,
      name: `A${String(number).padStart(2, "0")}`,
      position: array.frame === "local" ? enuToLocal(tabled, array.latitude) : add(centre, oriented(tabled)),
      diameter: array.diameter,
    });
  });
  return {
    stations,
    array: {
      name: array.name,
      frame: array.frame,
      antennas,
      fromTable: true,
      siderealTimeAtReference: (greenwichSiderealTime(referenceDay) * 180) / Math.PI,
      degreesPerDay: SIDEREAL_DEGREES_PER_DAY,
      referenceDay,
      ut1MinusUtc: 0,
      timeSystem: "UTC",
    },
  };
}

function add(a: Vector3, b: Vector3): Vector3 {
  return [a[0] + b[0], a[1] + b[1], a[2] + b[2]];
}

/** What is held in memory while rows are made: 2^21 samples of a row take 170 MB, 2^23 gains or delays 200 MB. */
const MOST_INTEGRATIONS = 1 << 20;
const MOST_ROW_SAMPLES = 1 << 21;
const MOST_IN_TABLE = 1 << 23;

function requireModestSize(scenario: Scenario, antennas: number, integrations: number): void {
  const channels = scenario.frequency.subbands * scenario.frequency.channels;
  const sizes = [
    ["samples in a row", channels * scenario.polarizations.length, MOST_ROW_SAMPLES, "frequency"],
    ["antennas x channels", 2 * antennas * channels, MOST_IN_TABLE, "frequency"],
    ["antennas x integrations", antennas * integrations, MOST_IN_TABLE, "time"],
  ] as const;
  for (const [what, size, most, key] of sizes) {
    if (size <= most) continue;
    throw new InputError(`${size} ${what}: expected at most ${most}`, { part: `scenario, ${key}` });
  }
}

/** Centres of the integrations that fit into the scans, and the field each looks at. */
function timesOf(scenario: Scenario, start: number): { times: Float64Array; fieldAt: Int32Array } {
  const { duration, integration, gap } = scenario.time;
  if (duration / integration > MOST_INTEGRATIONS) {
    throw new InputError(
      `more than ${MOST_INTEGRATIONS} integrations of ${integration} s`,
      { part: "scenario, time" },
      "Give a shorter duration or a longer integration",
    );
  }
  const scan = Math.min(scenario.time.scan ?? duration, duration);
  const perScan = Math.floor(scan / integration + 1e-9);
  const times: number[] = [];
  const fieldAt: number[] = [];
  for (let index = 0; ; index++) {
    const begin = index * (perScan * integration + gap);
    if (perScan < 1 || begin + integration > duration * (1 + 1e-12)) break;
    for (let i = 0; i < perScan; i++) {
      const end = begin + (i + 1) * integration;
      if (end > duration * (1 + 1e-12)) break;
      const mjd = start + (end - integration / 2) / SECONDS_PER_DAY;
      times.push(Math.round(mjd / TIME_GRID) * TIME_GRID);
      fieldAt.push(index % scenario.fields.length);
    }
  }
  if (times.length === 0) {
    throw new InputError(
      `no integration of ${integration} s fits into ${Math.min(scan, duration)} s`,
      { part: "scenario, time" },
      "Give a longer duration or scan, or a shorter integration",
    );
  }
  return { times: Float64Array.from(times), fieldAt: Int32Array.from(fieldAt) };
}

function pairsOf(antennas: number, autocorrelations: boolean): { first: Int32Array; second: Int32Array } {
  const first: number[] = [];
  const second: number[] = [];
  for (let i = 0; i < antennas; i++) {
    for (let j = autocorrelations ? i : i + 1; j < antennas; j++) {
      first.push(i);
      second.push(j);
    }
  }
  return { first: Int32Array.from(first), second: Int32Array.from(second) };
}

function setupOf({ frequency }: Scenario): { setup: Setup; channelStep: number; bandCentre: number } {
  const { subbands, channels, width, descending, start } = frequency;
  const channelStep = descending ? -width : width;
  const spacing = frequency.spacing ?? channels * width;
  const frequencies = new Float64Array(subbands * channels);
  for (let subband = 0; subband < subbands; subband++) {
    const offset = subband * (descending ? -spacing : spacing);
    for (let channel = 0; channel < channels; channel++) {
      frequencies[subband * channels + channel] = start + offset + channel * channelStep;
    }
  }
  const last = frequencies.at(-1)!;
  if (last <= 0) {
    throw new InputError(`the band runs down to ${last} Hz`, { part: "scenario, frequency" });
  }
  return {
    setup: { id: 1, frequencies, channelWidths: new Float64Array(subbands).fill(width) },
    channelStep,
    bandCentre: (start + last) / 2,
  };
}

/** Sources are seen in fields that there are. */
function requireKnownFields({ sky, fields }: Scenario): void {
  sky.forEach((source, i) => {
    const unknown = source.fields?.find((id) => id > fields.length);
    if (unknown === undefined) return;
    throw new InputError(`there is no field ${unknown}: there are ${fields.length}`, {
      part: `scenario, sky.${i}.fields`,
    });
  });
}

/** Hands named by faults must be hands of the products, and antennas must exist. */
function requireKnownHands(scenario: Scenario): void {
  const hands = handsOf(scenario.polarizations);
  scenario.faults.forEach((fault, i) => {
    const place = { part: `scenario, faults.${i}` };
    if ("hand" in fault && fault.hand !== undefined && !hands.includes(fault.hand)) {
      throw new InputError(
        `hand ${fault.hand} is in none of the polarizations ${scenario.polarizations.join(", ")}`,
        place,
      );
    }
    if (fault.kind === "exchanged-hands" && hands.length === 0) {
      throw new InputError(`${scenario.polarizations.join(", ")} has no hands to exchange`, place);
    }
  });
}
