/** What a fault concerns, worked out for quick questions by integration, baseline and place in a row. */

import type { Selection } from "../../dataset/selection.ts";
import { SECONDS_PER_DAY } from "../../util/constants.ts";
import { InputError } from "../../util/errors.ts";
import type { Observation } from "../observation.ts";
import { type Hand, handIndex } from "../products.ts";
import type { Effect } from "./effect.ts";

/** The keys of a fault that say which samples; every one optional. */
export interface Where {
  readonly time?: readonly [number, number] | undefined;
  readonly subbands?: readonly number[] | undefined;
  readonly channels?: readonly (readonly [number, number])[] | undefined;
  readonly polarizations?: Selection["polarizations"] | undefined;
  readonly fields?: readonly number[] | undefined;
  readonly antennas?: readonly number[] | undefined;
  readonly baselines?: readonly (readonly [number, number])[] | undefined;
  readonly shorter_than?: number | undefined;
}

export interface Scope {
  readonly selection: Selection;
  /** (integrations), (baselines): 1 where concerned; a row is where both are */
  readonly times: Uint8Array;
  readonly baselines: Uint8Array;
  /** places in a row, ascending */
  readonly samples: Int32Array;
}

/** @throws InputError when it names what the scenario does not have */
export function scopeOf(where: Where, observation: Observation, place: string): Scope {
  const { times, selected: time } = timesOf(where, observation, place);
  const { baselines, pairs } = baselinesOf(where, observation, place);
  const samples = samplesOf(where, observation, place);
  return {
    times,
    baselines,
    samples,
    selection: {
      antennas: where.antennas ?? null,
      baselines: pairs,
      time,
      subbands: where.subbands ?? null,
      channels: where.channels ?? null,
      polarizations: where.polarizations ?? null,
      fields: where.fields ?? null,
    },
  };
}

/** `where` of one antenna's fault, on its baselines to others; with a hand, the products that join it. */
export function antennaScope(
  fault: Where & { readonly antenna: number; readonly hand?: Hand | undefined },
  observation: Observation,
  place: string,
): Scope {
  const { hand, antenna } = fault;
  const joined =
    hand === undefined
      ? undefined
      : observation.products
          .filter(({ hand1, hand2 }) => hand1 === handIndex(hand) || hand2 === handIndex(hand))
          .map(({ name }) => name)
          .filter((name) => fault.polarizations?.includes(name) ?? true);
  const scope = scopeOf(
    { ...fault, antennas: [antenna], polarizations: joined ?? fault.polarizations },
    observation,
    place,
  );
  const { first, second } = observation;
  return { ...scope, baselines: scope.baselines.map((inside, b) => (first[b] === second[b] ? 0 : inside)) };
}

/** Whether a row is in the scope: for `Effect.covers`. */
export function coverage({ times, baselines }: Scope): Effect["covers"] {
  return (time, baseline) => times[time] === 1 && baselines[baseline] === 1;
}

/** These samples of every row that is covered: for `Effect.mark`. */
export function marksAll(samples: Int32Array): Effect["mark"] {
  return (_time, _baseline, out, at) => {
    for (const sample of samples) out[at + sample] = 1;
  };
}

/** Of `samples`, those of products for which `keep` holds. */
export function keepProducts(
  samples: Int32Array,
  observation: Observation,
  keep: (product: Observation["products"][number], index: number) => boolean,
): Int32Array {
  const { products } = observation;
  const kept = products.map(keep);
  return samples.filter((sample) => kept[sample % products.length]!);
}

export function stationIndex(observation: Observation, antenna: number, place: string): number {
  const index = observation.stations.findIndex(({ number }) => number === antenna);
  if (index >= 0) return index;
  const numbers = observation.stations.map(({ number }) => number);
  throw new InputError(`there is no antenna ${antenna}: the numbers are ${numbers.join(", ")}`, {
    part: `scenario, ${place}`,
  });
}

function timesOf(
  where: Where,
  observation: Observation,
  place: string,
): { times: Uint8Array; selected: Selection["time"] } {
  const { times, fieldAt, fields, start } = observation;
  const unknown = where.fields?.find((id) => id > fields.length);
  if (unknown !== undefined) {
    throw new InputError(`there is no field ${unknown}: there are ${fields.length}`, {
      part: `scenario, ${place}.fields`,
    });
  }
  const inside = new Uint8Array(times.length);
  let first = -1;
  let last = -1;
  for (let t = 0; t < times.length; t++) {
    const seconds = (times[t]! - start) * SECONDS_PER_DAY;
    if (where.time !== undefined && !(seconds >= where.time[0] && seconds <= where.time[1])) continue;
    if (where.fields !== undefined && !where.fields.includes(fieldAt[t]! + 1)) continue;
    inside[t] = 1;
    if (first < 0) first = t;
    last = t;
  }
  if (first < 0) {
    throw new InputError("no integration lies in the fault's time and fields", {
      part: `scenario, ${place}`,
    });
  }
  return { times: inside, selected: where.time === undefined ? null : [times[first]!, times[last]!] };
}

function baselinesOf(
  where: Where,
  observation: Observation,
  place: string,
): { baselines: Uint8Array; pairs: Selection["baselines"] } {
  const { first, second, stations } = observation;
  const antennas = where.antennas?.map((number) => stationIndex(observation, number, `${place}.antennas`));
  const listed = where.baselines?.map(
    (pair) =>
      pair.map((number) => stationIndex(observation, number, `${place}.baselines`)) as [number, number],
  );
  const inside = new Uint8Array(observation.baselines);
  const pairs: [number, number][] = [];
  for (let b = 0; b < inside.length; b++) {
    const i = first[b]!;
    const j = second[b]!;
    if (antennas !== undefined && !antennas.includes(i) && !antennas.includes(j)) continue;
    if (listed !== undefined && !listed.some(([p, q]) => (p === i && q === j) || (p === j && q === i)))
      continue;
    if (where.shorter_than !== undefined && !(separation(observation, i, j) < where.shorter_than)) continue;
    inside[b] = 1;
    pairs.push([stations[i]!.number, stations[j]!.number]);
  }
  if (pairs.length === 0) {
    throw new InputError("no baseline is concerned by the fault", { part: `scenario, ${place}` });
  }
  const named = where.baselines !== undefined || where.shorter_than !== undefined;
  return { baselines: inside, pairs: named ? pairs : null };
}

function separation({ stations }: Observation, i: number, j: number): number {
  const a = stations[i]!.actual;
  const b = stations[j]!.actual;
  return Math.hypot(a[0] - b[0], a[1] - b[1], a[2] - b[2]);
}

function samplesOf(where: Where, observation: Observation, place: string): Int32Array {
  const { shape, polarizations } = observation;
  const far = where.channels?.find(([, high]) => high >= shape.channels);
  if (far !== undefined) {
    throw new InputError(`channel ${far[1]} is past the last, ${shape.channels - 1}`, {
      part: `scenario, ${place}.channels`,
    });
  }
  const samples: number[] = [];
  let at = 0;
  for (let subband = 0; subband < shape.subbands; subband++) {
    for (let channel = 0; channel < shape.channels; channel++) {
      for (const name of polarizations) {
        const inside =
          (where.subbands?.includes(subband) ?? true) &&
          (where.channels?.some(([low, high]) => channel >= low && channel <= high) ?? true) &&
          (where.polarizations?.includes(name) ?? true);
        if (inside) samples.push(at);
        at += 1;
      }
    }
  }
  if (samples.length === 0) {
    throw new InputError("no sub-band, channel and polarization is concerned by the fault", {
      part: `scenario, ${place}`,
    });
  }
  return Int32Array.from(samples);
}

/** Where in the scenario a fault stands. */
export function placeOf(index: number): string {
  return `faults.${index}`;
}
