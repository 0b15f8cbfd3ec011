/** The channels of a cause, where it is not in all of them. */
import type { Visibilities } from "../sky/model.ts";
import type { Understanding } from "../sky/understand.ts";
import type { Candidate } from "./candidate.ts";

/** A cause of channels holds this much of what its samples are off by, in no more than this share of them. */
const LEAST_HELD = 0.85;
const MOST_CHANNELS = 0.5;

export interface Narrowed {
  readonly channels: readonly (readonly [number, number])[] | null;
  readonly members: Uint8Array;
}

export function narrowed(
  { atoms }: Understanding,
  rest: Visibilities,
  candidate: Candidate,
  members: Uint8Array,
): Narrowed {
  if (candidate.kind === "channel") {
    return { channels: [[candidate.which, candidate.which]], members };
  }
  const { channels } = atoms.bins;
  const excess = new Float64Array(channels);
  for (let k = 0; k < atoms.count; k++) {
    if (members[k] === 0) continue;
    const power = atoms.weight[k]! * (rest.re[k]! ** 2 + rest.im[k]! ** 2);
    excess[atoms.channel[k]!]! += power - 2 * atoms.noise;
  }
  const all = excess.reduce((sum, value) => sum + Math.max(0, value), 0);
  const order = Array.from(excess.keys()).sort((a, b) => excess[b]! - excess[a]!);
  const chosen: number[] = [];
  let held = 0;
  for (const channel of order) {
    if (held >= LEAST_HELD * all) break;
    held += Math.max(0, excess[channel]!);
    chosen.push(channel);
  }
  if (channels < 2 || chosen.length > MOST_CHANNELS * channels) return { channels: null, members };
  const set = new Set(chosen);
  return {
    channels: rangesOf(chosen),
    members: members.map((one, k) => (one === 1 && set.has(atoms.channel[k]!) ? 1 : 0)),
  };
}

export function rangesOf(numbers: readonly number[]): [number, number][] {
  const ranges: [number, number][] = [];
  for (const number of [...numbers].sort((a, b) => a - b)) {
    const last = ranges.at(-1);
    if (last !== undefined && number === last[1] + 1) last[1] = number;
    else ranges.push([number, number]);
  }
  return ranges;
}
