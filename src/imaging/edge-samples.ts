/**
 * The samples of the image, thinned where they are very many, for sums over what a source at the field's edge would
 * do: channel groups of the channel-averaged tracks, at the weights of the planned image.
 */
import { type FilledCells, fieldCells } from "./moment-grid.ts";
import { type Sampling, trackOffset, trackWeight } from "./sampling.ts";

/** (count) each */
export interface EdgeSamples {
  readonly count: number;
  /** share of the image's samples that these are; 1 where they are all of them */
  readonly share: number;
  /** wavelengths at the group's frequency */
  readonly u: Float64Array;
  readonly v: Float64Array;
  readonly w: Float64Array;
  /** imaging weight of the planned weighting */
  readonly weight: Float64Array;
  /** natural weight */
  readonly natural: Float64Array;
  /** Hz */
  readonly frequency: Float64Array;
  readonly channelWidth: Float64Array;
  /** seconds; the survey's typical where the file does not say */
  readonly integration: Float64Array;
  /** index into Survey.baselines */
  readonly baseline: Int32Array;
}

/** More add nothing: sums over this many are good to a fraction of a per cent. */
const MOST_SAMPLES = 60_000;
/** Groups of channels into which a sub-band of more than this fractional width is cut. */
const GROUP_WIDTH = 0.005;
const MOST_GROUPS = 16;

/** By (u, v) in wavelengths, the planned weighting's factor on the weights there; 0 outside the filled cells. */
export type FactorLookup = (u: number, v: number) => number;

export function factorLookup(cells: FilledCells, factors: Float64Array): FactorLookup {
  const place = fieldCells(cells);
  const { field } = cells.form;
  return (u, v) => {
    const sign = u < 0 || (u === 0 && v < 0) ? -1 : 1;
    const iu = Math.floor(sign * u * field + 0.5);
    let iv = Math.floor(sign * v * field + 0.5);
    if (iu === 0 && iv < 0) iv = Math.floor(-sign * v * field + 0.5);
    const at = place(iu, iv);
    return at < 0 ? 0 : factors[at]!;
  };
}

/**
 * @param wOf (cells of the tracks) seconds: the file's w, or the recomputed one
 */
export function edgeSamples(sampling: Sampling, wOf: Float64Array, factorAt: FactorLookup): EdgeSamples {
  const { survey, products, field } = sampling;
  const { tracks, dataset } = survey;
  const { subbands } = dataset.shape;
  const groups = channelGroups(sampling);
  const chosen: number[] = [];
  for (let cell = 0; cell < tracks.cells; cell++) {
    if (tracks.field[cell] === field.id && Number.isFinite(tracks.u[cell]! + tracks.v[cell]!))
      chosen.push(cell);
  }
  const perCell = groups.reduce((sum, setup) => sum + setup.length, 0) / Math.max(1, groups.length);
  const share = Math.min(1, MOST_SAMPLES / Math.max(1, chosen.length * perCell));
  const columns: number[][] = Array.from({ length: 8 }, () => []);
  const baselines: number[] = [];
  for (const cell of chosen) {
    if (share < 1 && scramble(cell) >= share) continue;
    const integration = tracks.integration[cell]!;
    const seconds = integration > 0 ? integration : survey.integration;
    for (const { subband, frequency, width, part } of groups[tracks.setup[cell]!]!) {
      if (subband >= subbands) continue;
      const natural = part * trackWeight(tracks, trackOffset(dataset, cell, subband), products);
      if (natural === 0) continue;
      const u = tracks.u[cell]! * frequency;
      const v = tracks.v[cell]! * frequency;
      const row = [
        u,
        v,
        wOf[cell]! * frequency,
        natural * factorAt(u, v),
        natural,
        frequency,
        width,
        seconds,
      ];
      row.forEach((value, i) => {
        columns[i]!.push(value);
      });
      baselines.push(tracks.baseline[cell]!);
    }
  }
  const [u, v, w, weight, natural, frequency, channelWidth, integration] = columns.map((column) =>
    Float64Array.from(column),
  ) as Eight;
  const baseline = Int32Array.from(baselines);
  return { count: u.length, share, u, v, w, weight, natural, frequency, channelWidth, integration, baseline };
}

type Column = Float64Array;
type Eight = [Column, Column, Column, Column, Column, Column, Column, Column];

/** A group of used channels: its share of the sub-band's weight is `part`. */
interface ChannelGroup {
  readonly subband: number;
  /** Hz, mean of its channels */
  readonly frequency: number;
  /** Hz, of one channel */
  readonly width: number;
  readonly part: number;
}

/** By setup. */
function channelGroups(sampling: Sampling): ChannelGroup[][] {
  const { dataset } = sampling.survey;
  const { subbands, channels } = dataset.shape;
  return dataset.setups.map((setup) => {
    const groups: ChannelGroup[] = [];
    for (let s = 0; s < subbands; s++) {
      const used: number[] = [];
      for (let c = s * channels; c < (s + 1) * channels; c++) {
        if (sampling.channelUsed[c] === 1) used.push(setup.frequencies[c]!);
      }
      if (used.length === 0) continue;
      const span = Math.abs(used.at(-1)! - used[0]!) / used[0]!;
      const count = Math.min(used.length, MOST_GROUPS, Math.max(1, Math.ceil(span / GROUP_WIDTH)));
      for (let g = 0; g < count; g++) {
        const from = Math.floor((g * used.length) / count);
        const members = used.slice(from, Math.floor(((g + 1) * used.length) / count));
        const mean = members.reduce((sum, frequency) => sum + frequency, 0) / members.length;
        const part = members.length / used.length;
        groups.push({ subband: s, frequency: mean, width: setup.channelWidths[s]!, part });
      }
    }
    return groups;
  });
}

/** A fixed, evenly spread number 0..1 for each index, so that thinning follows no order in the data. */
function scramble(index: number): number {
  let x = Math.imul(index + 1, 0x9e3779b1);
  x = Math.imul(x ^ (x >>> 15), 0x85ebca6b);
  x = Math.imul(x ^ (x >>> 13), 0xc2b2ae35);
  return ((x ^ (x >>> 16)) >>> 0) / 2 ** 32;
}
