/**
 * The geometry of a dataset judged: whether u, v, w follow from the antenna table, the times and the phase centre,
 * and, where they do not, the smallest fault that explains them.
 */

import type { ArrayInfo, Field } from "../dataset/dataset.ts";
import { SPEED_OF_LIGHT } from "../util/constants.ts";
import { type AntennaOffset, antennaOffsets } from "./antenna-offsets.ts";
import { fillExpected, fillRepaired, type Orientation, orient, signsOf } from "./compare-uvw.ts";
import { concludeGeometry, type GeometryJudgement, type Rest } from "./geometry-faults.ts";
import { equinoxDay, precess } from "./precession.ts";
import { siderealTimeOf } from "./sidereal.ts";
import type { Spacings } from "./spacing-sums.ts";
import { hourAngle } from "./uvw.ts";

/** Rows or cells of a dataset; columns of one length. */
export interface UvwSamples {
  readonly antenna1: ArrayLike<number>;
  readonly antenna2: ArrayLike<number>;
  /** MJD (UTC) */
  readonly time: ArrayLike<number>;
  /** what the file calls seconds */
  readonly u: ArrayLike<number>;
  readonly v: ArrayLike<number>;
  readonly w: ArrayLike<number>;
}

export type Judged =
  | { readonly judged: true; readonly result: GeometryJudgement }
  | { readonly judged: false; readonly why: string };

/** More samples than these change nothing. */
const MOST_SAMPLES = 6000;
/** An antenna is off when it stands out this much from the others, and by enough to matter. */
const OFF_SIGNIFICANCE = 8;
const OFF_LEAST_SHARE = 3e-5;

export function judgeGeometry(
  array: ArrayInfo,
  field: Field,
  samples: UvwSamples,
  frequency: number,
): Judged {
  const why = whyNot(array, field);
  if (why !== null) return { judged: false, why };
  const chosen = choose(array, samples);
  if (chosen.length < 3)
    return { judged: false, why: "too few rows have finite u, v, w and antennas of the table" };
  const spacings = spacingsOf(array, field, samples, chosen);
  if (!spacings.u.some((value, i) => value !== 0 || spacings.v[i] !== 0)) {
    return { judged: false, why: "u and v are zero throughout" };
  }
  return { judged: true, result: judge(array, field, samples, chosen, spacings, frequency) };
}

function whyNot(array: ArrayInfo, field: Field): string | null {
  if (!array.fromTable) return "there is no antenna table";
  const placed = array.antennas.filter((antenna) => antenna.position !== null);
  if (placed.length < 3) return "the antenna table has fewer than 3 positions";
  const first = placed[0]!.position!;
  if (placed.every((antenna) => distance(antenna.position!, first) === 0)) {
    return "the antenna table has one position for all antennas";
  }
  if (!Number.isFinite(field.rightAscension + field.declination)) return "the phase centre is unknown";
  return null;
}

function distance(a: readonly [number, number, number], b: readonly [number, number, number]): number {
  return Math.hypot(a[0] - b[0], a[1] - b[1], a[2] - b[2]);
}

/** Indices of samples that can be compared, at most a few thousand, evenly spread. */
function choose(array: ArrayInfo, samples: UvwSamples): number[] {
  const placed = new Set(array.antennas.filter((a) => a.position !== null).map((a) => a.number));
  const usable: number[] = [];
  for (let i = 0; i < samples.u.length; i++) {
    if (samples.antenna1[i] === samples.antenna2[i]) continue;
    if (!placed.has(samples.antenna1[i]!) || !placed.has(samples.antenna2[i]!)) continue;
    if (Number.isFinite(samples.u[i]! + samples.v[i]! + samples.w[i]! + samples.time[i]!)) usable.push(i);
  }
  if (usable.length <= MOST_SAMPLES) return usable;
  // An irrational stride meets every baseline and every time.
  const stride = usable.length / MOST_SAMPLES;
  return Array.from({ length: MOST_SAMPLES }, (_, k) => {
    const jitter = (k * 0.6180339887498949) % 1;
    return usable[Math.min(usable.length - 1, Math.floor((k + jitter) * stride))]!;
  });
}

function spacingsOf(
  array: ArrayInfo,
  field: Field,
  samples: UvwSamples,
  chosen: readonly number[],
): Spacings {
  const position = new Map(array.antennas.map((antenna) => [antenna.number, antenna.position]));
  const column = () => new Float64Array(chosen.length);
  const spacings = {
    u: column(),
    v: column(),
    w: column(),
    x: column(),
    y: column(),
    z: column(),
    hourAngle: column(),
    sign: new Int8Array(chosen.length).fill(1),
  };
  chosen.forEach((sample, i) => {
    spacings.u[i] = samples.u[sample]! * SPEED_OF_LIGHT;
    spacings.v[i] = samples.v[sample]! * SPEED_OF_LIGHT;
    spacings.w[i] = samples.w[sample]! * SPEED_OF_LIGHT;
    const a = position.get(samples.antenna1[sample]!)!;
    const b = position.get(samples.antenna2[sample]!)!;
    spacings.x[i] = a[0] - b[0];
    spacings.y[i] = a[1] - b[1];
    spacings.z[i] = a[2] - b[2];
    spacings.hourAngle[i] = hourAngle(siderealTimeOf(array, samples.time[sample]!), field.rightAscension);
  });
  return spacings;
}

/** The phase centre as the catalogue has it and, where its equinox is known, at the equator of the date. */
function placesOf(field: Field, day: number, spacings: Spacings) {
  const catalogue = { convention: "catalogue" as const, spacings, declination: field.declination };
  if (!Number.isFinite(field.equinox)) return [catalogue];
  const date = precess(field.rightAscension, field.declination, equinoxDay(field.equinox), day);
  const shift = date.rightAscension - field.rightAscension;
  const turned = { ...spacings, hourAngle: spacings.hourAngle.map((angle) => angle - shift) };
  return [catalogue, { convention: "of-date" as const, spacings: turned, declination: date.declination }];
}

function judge(
  array: ArrayInfo,
  field: Field,
  samples: UvwSamples,
  chosen: readonly number[],
  spacings: Spacings,
  frequency: number,
): GeometryJudgement {
  const turnKnown = array.frame === "geocentric";
  const places = placesOf(field, samples.time[chosen[0]!]!, spacings);
  const groups = groupByBaseline(samples, chosen);
  let orientation = orient(places, turnKnown);
  const asIs = orientation.asIs;
  for (let round = 0; round < 2; round++) {
    const held = places.find((place) => place.convention === orientation.convention)!.spacings;
    if (!turnReversed(groups, held, orientation)) break;
    for (const place of places) place.spacings.sign.set(held.sign);
    orientation = orient(places, turnKnown);
  }
  const held = places.find((place) => place.convention === orientation.convention)!.spacings;
  const reversed = groups.filter((group) => held.sign[group.samples[0]!]! < 0);
  const offsets = offsetsOf(array, groups, held, orientation);
  const off = furthest(array, offsets);
  return concludeGeometry({
    orientation,
    asIs,
    turnKnown,
    frequency,
    rest: restOf(groups, held, orientation),
    reversed: reversed.map(({ antenna1, antenna2 }) => [antenna1, antenna2]),
    offsets,
    off,
    baselines: groups.map(({ antenna1, antenna2, samples: own }) => ({
      antenna1,
      antenna2,
      relativeRms: relativeRms(own, held, orientation, true),
      reversed: held.sign[own[0]!]! < 0,
    })),
  });
}

interface Group {
  readonly antenna1: number;
  readonly antenna2: number;
  /** indices into the spacings */
  readonly samples: readonly number[];
}

function groupByBaseline(samples: UvwSamples, chosen: readonly number[]): Group[] {
  const groups = new Map<number, Group & { samples: number[] }>();
  chosen.forEach((sample, i) => {
    const antenna1 = samples.antenna1[sample]!;
    const antenna2 = samples.antenna2[sample]!;
    const key = antenna1 * 65536 + antenna2;
    const group = groups.get(key) ?? { antenna1, antenna2, samples: [] };
    group.samples.push(i);
    groups.set(key, group);
  });
  return [...groups.values()].sort((a, b) => a.antenna1 - b.antenna1 || a.antenna2 - b.antenna2);
}

/** Turn the sign of every baseline that fits better the other way round; whether any was turned. */
function turnReversed(groups: readonly Group[], spacings: Spacings, orientation: Orientation): boolean {
  const measured = new Float64Array(3);
  const expected = new Float64Array(3);
  let turned = 0;
  for (const { samples } of groups) {
    let [product, squares] = [0, 0];
    for (const i of samples) {
      fillRepaired(spacings, orientation, i, measured);
      fillExpected(spacings, orientation, i, expected);
      for (let k = 0; k < 3; k++) {
        if (Number.isNaN(measured[k]!)) continue;
        product += measured[k]! * expected[k]!;
        squares += expected[k]! * expected[k]!;
      }
    }
    // Half way and more to the opposite: noise or an antenna's offset does not do that.
    if (!(squares > 0 && product < -0.5 * squares)) continue;
    turned += 1;
    for (const i of samples) spacings.sign[i] = -spacings.sign[i]!;
  }
  return turned > 0 && turned < groups.length;
}

/** Mean difference of each baseline, turned back into the Earth's frame. */
function offsetsOf(
  array: ArrayInfo,
  groups: readonly Group[],
  spacings: Spacings,
  orientation: Orientation,
): Map<number, AntennaOffset> {
  const placed = array.antennas.filter((antenna) => antenna.position !== null);
  const index = new Map(placed.map((antenna, i) => [antenna.number, i]));
  const differences = [0, 1, 2].map(() => new Float64Array(groups.length)) as [
    Float64Array,
    Float64Array,
    Float64Array,
  ];
  groups.forEach((group, g) => {
    const mean = meanDifference(group, spacings, orientation);
    for (let k = 0; k < 3; k++) differences[k]![g] = mean[k]!;
  });
  const used = new Set(groups.flatMap((group) => [group.antenna1, group.antenna2]));
  const centre = [0, 1, 2].map(
    (k) => placed.reduce((sum, antenna) => sum + antenna.position![k]!, 0) / placed.length,
  );
  const solved = antennaOffsets(
    {
      first: Int32Array.from(groups, (group) => index.get(group.antenna1)!),
      second: Int32Array.from(groups, (group) => index.get(group.antenna2)!),
    },
    differences,
    placed.map(({ position }) => [
      position![0] - centre[0]!,
      position![1] - centre[1]!,
      position![2] - centre[2]!,
    ]),
  );
  const offsets = new Map<number, AntennaOffset>();
  placed.forEach((antenna, i) => {
    if (solved !== null && used.has(antenna.number)) offsets.set(antenna.number, solved[i]!);
  });
  return offsets;
}

/** NaN where an axis is zero: what the other two say of it depends on how they turn. */
function meanDifference(
  group: Group,
  spacings: Spacings,
  orientation: Orientation,
): [number, number, number] {
  const measured = new Float64Array(3);
  const expected = new Float64Array(3);
  const sum = [0, 0, 0];
  const sinD = Math.sin(orientation.declination);
  const cosD = Math.cos(orientation.declination);
  const mirror = orientation.mirrored ? -1 : 1;
  for (const i of group.samples) {
    fillRepaired(spacings, orientation, i, measured);
    fillExpected(spacings, orientation, i, expected);
    const [du, dv, dw] = [
      measured[0]! - expected[0]!,
      measured[1]! - expected[1]!,
      measured[2]! - expected[2]!,
    ];
    const angle = spacings.hourAngle[i]! + orientation.fit.turn;
    const meridian = -sinD * dv + cosD * dw;
    sum[0]! += Math.sin(angle) * du + Math.cos(angle) * meridian;
    sum[1]! += mirror * (Math.cos(angle) * du - Math.sin(angle) * meridian);
    sum[2]! += cosD * dv + sinD * dw;
  }
  const count = group.samples.length;
  return [sum[0]! / count, sum[1]! / count, sum[2]! / count];
}

function furthest(array: ArrayInfo, offsets: ReadonlyMap<number, AntennaOffset>): number | null {
  const placed = array.antennas.filter((antenna) => antenna.position !== null);
  const extent = Math.max(...placed.map((antenna) => distance(antenna.position!, placed[0]!.position!)));
  let best: number | null = null;
  for (const [number, { distance: length, significance }] of offsets) {
    if (significance < OFF_SIGNIFICANCE || length < OFF_LEAST_SHARE * extent) continue;
    if (best === null || length > offsets.get(best)!.distance) best = number;
  }
  return best;
}

/** What is left of u, v, w after the orientation is put right, and the turn of (u, v) in it. */
function restOf(groups: readonly Group[], spacings: Spacings, orientation: Orientation): Rest {
  const all = groups.flatMap((group) => group.samples);
  const measured = new Float64Array(3);
  const expected = new Float64Array(3);
  let [cross, dot] = [0, 0];
  for (const i of all) {
    fillRepaired(spacings, orientation, i, measured);
    fillExpected(spacings, orientation, i, expected);
    cross += measured[0]! * expected[1]! - measured[1]! * expected[0]!;
    dot += measured[0]! * expected[0]! + measured[1]! * expected[1]!;
  }
  return { rms: relativeRms(all, spacings, orientation, true), rotation: Math.atan2(cross, dot) };
}

function relativeRms(
  samples: readonly number[],
  spacings: Spacings,
  orientation: Orientation,
  allAxes: boolean,
): number {
  const measured = new Float64Array(3);
  const expected = new Float64Array(3);
  let [squares, total] = [0, 0];
  for (const i of samples) {
    fillRepaired(spacings, orientation, i, measured);
    fillExpected(spacings, orientation, i, expected);
    for (let k = 0; k < (allAxes ? 3 : 2); k++) {
      if (Number.isNaN(measured[k]!)) continue;
      squares += (measured[k]! - expected[k]!) ** 2;
      total += expected[k]! ** 2;
    }
  }
  return total > 0 ? Math.sqrt(squares / total) : Number.NaN;
}

/** Fills `out` with the u, v, w (metres) of a baseline at a time, as the tables give them in this orientation. */
export type UvwPredictor = (antenna1: number, antenna2: number, time: number, out: Float64Array) => boolean;

/**
 * u, v, w from the tables in the orientation that was found, with the file's sign; false where an antenna has no
 * position. The day decides which equator "of date" is.
 */
export function uvwPredictor(
  array: ArrayInfo,
  field: Field,
  orientation: Orientation,
  day: number,
): UvwPredictor {
  const positions = new Map(array.antennas.map((antenna) => [antenna.number, antenna.position]));
  const sign = signsOf(orientation.fit.map).reversed ? -1 : 1;
  const one = {
    x: new Float64Array(1),
    y: new Float64Array(1),
    z: new Float64Array(1),
    hourAngle: new Float64Array(1),
  };
  const centre =
    orientation.convention === "catalogue"
      ? field
      : precess(field.rightAscension, field.declination, equinoxDay(field.equinox), day);
  return (antenna1, antenna2, time, out) => {
    const a = positions.get(antenna1);
    const b = positions.get(antenna2);
    if (a === null || b === null || a === undefined || b === undefined) return false;
    one.x[0] = sign * (a[0] - b[0]);
    one.y[0] = sign * (a[1] - b[1]);
    one.z[0] = sign * (a[2] - b[2]);
    one.hourAngle[0] = hourAngle(siderealTimeOf(array, time), centre.rightAscension);
    fillExpected(one, orientation, 0, out);
    return true;
  };
}
