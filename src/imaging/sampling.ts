/**
 * What of a survey an image is made from: the field, the products that carry total intensity, the frequencies,
 * the weights and the noise. Later stages ask here and not the survey, so that they agree on what counts.
 */
import type { Dataset, Field, Polarization } from "../dataset/dataset.ts";
import { OCTAVES, type OtherRows } from "../measure/other-spacings.ts";
import type { Survey, Tracks } from "../measure/survey-result.ts";

export interface Sampling {
  readonly survey: Survey;
  /** the field imaged: the one with the largest usable weight */
  readonly field: Field;
  /** indices into Dataset.polarizations of the products that the image adds */
  readonly products: Int32Array;
  /** (subbands x channels) 1 where any baseline has a usable sample of those products */
  readonly channelUsed: Uint8Array;
  /** Hz, mean of the used channels over the setups */
  readonly meanFrequency: number;
  /** sum of the usable weights of the field and products */
  readonly totalWeight: number;
  /** spacings of usable samples, wavelengths; NaN without any. Exact zeros (antennas at one place) are left out. */
  readonly shortest: number;
  readonly longest: number;
  /** largest |u| or |v|, wavelengths */
  readonly extent: number;
  /** shortest and longest spacing of any row of the field, flagged ones too */
  readonly everShortest: number;
  readonly everLongest: number;
}

/** Spacings below this share of the longest are of antennas at one place, not of a baseline. */
const SAME_PLACE = 1e-6;

/** Products that add up to total intensity, by what the dataset has. */
const TOTAL_INTENSITY: readonly (readonly Polarization[])[] = [["I"], ["RR", "LL"], ["XX", "YY"]];

export function samplingOf(survey: Survey): Sampling {
  const { dataset } = survey;
  const products = intensityProducts(dataset);
  const weights = weightsOf(survey, products);
  const field = mainField(dataset.fields, weights);
  const channelUsed = usedChannels(survey, products);
  const range = frequencyRange(dataset, channelUsed);
  return {
    survey,
    field,
    products,
    channelUsed,
    meanFrequency: range.mean,
    totalWeight: weights.get(field.id) ?? 0,
    ...spacings(survey, products, field.id, range),
    ...everySpacing(survey, field.id),
  };
}

/**
 * I, or the two parallel hands; whichever of them the dataset has. A dataset of other products alone is imaged from
 * what it has.
 */
export function intensityProducts(dataset: Dataset): Int32Array {
  for (const names of TOTAL_INTENSITY) {
    const found = dataset.polarizations.flatMap((name, index) => (names.includes(name) ? [index] : []));
    if (found.length > 0) return Int32Array.from(found);
  }
  return Int32Array.from(dataset.polarizations.keys());
}

/** (cells x subbands x polarizations) offset of the first polarization. */
export function trackOffset(dataset: Dataset, cell: number, subband: number): number {
  return (cell * dataset.shape.subbands + subband) * dataset.shape.polarizations;
}

/** Usable weight of the image's products in one sub-band of a track cell. */
export function trackWeight(tracks: Tracks, offset: number, products: Int32Array): number {
  let sum = 0;
  for (let i = 0; i < products.length; i++) {
    const at = offset + products[i]!;
    const weight = tracks.weight[at]!;
    if (tracks.usable[at]! > 0 && weight > 0 && weight < Number.POSITIVE_INFINITY) sum += weight;
  }
  return sum;
}

/** Usable weight of the products that images add, by Field.id, of the fields that have rows. */
export function fieldWeights(survey: Survey): ReadonlyMap<number, number> {
  return weightsOf(survey, intensityProducts(survey.dataset));
}

function weightsOf({ tracks, dataset, others }: Survey, products: Int32Array): Map<number, number> {
  const weights = new Map<number, number>();
  let field = Number.NaN;
  let sum = 0;
  for (let cell = 0; cell < tracks.cells; cell++) {
    // Cells of one field follow each other: sums are looked up where it changes.
    if (tracks.field[cell] !== field) {
      if (cell > 0) weights.set(field, sum);
      field = tracks.field[cell]!;
      sum = weights.get(field) ?? 0;
    }
    for (let s = 0; s < dataset.shape.subbands; s++) {
      sum += trackWeight(tracks, trackOffset(dataset, cell, s), products);
    }
  }
  if (tracks.cells > 0) weights.set(field, sum);
  for (const rows of others?.rows ?? []) {
    let weight = weights.get(rows.field) ?? 0;
    for (let s = 0; s < dataset.shape.subbands; s++) {
      for (const product of products) weight += rows.weight[s * dataset.shape.polarizations + product]!;
    }
    weights.set(rows.field, weight);
  }
  return weights;
}

function mainField(fields: readonly Field[], weights: ReadonlyMap<number, number>): Field {
  let best = fields[0] ?? NO_FIELD;
  let most = -1;
  for (const field of fields) {
    const weight = weights.get(field.id) ?? 0;
    if (weight > most) {
      best = field;
      most = weight;
    }
  }
  return best;
}

const NO_FIELD: Field = {
  id: 1,
  name: "",
  rightAscension: Number.NaN,
  declination: Number.NaN,
  equinox: Number.NaN,
};

function usedChannels(survey: Survey, products: Int32Array): Uint8Array {
  const { subbands, channels, polarizations } = survey.dataset.shape;
  const used = new Uint8Array(subbands * channels);
  const { count } = survey.levels;
  for (let b = 0; b < survey.baselines.length; b++) {
    for (let c = 0; c < used.length; c++) {
      const offset = (b * used.length + c) * polarizations;
      for (let i = 0; i < products.length; i++) if (count[offset + products[i]!]! > 0) used[c] = 1;
    }
  }
  return used;
}

/** Of the used channels, by sub-band and setup. */
export interface FrequencyRange {
  /** (setups x subbands) Hz; NaN where no channel of the sub-band is used */
  readonly low: Float64Array;
  readonly high: Float64Array;
  readonly mean: number;
  /** of all */
  readonly highest: number;
}

export function frequencyRange(dataset: Dataset, channelUsed: Uint8Array): FrequencyRange {
  const { subbands, channels } = dataset.shape;
  const low = new Float64Array(dataset.setups.length * subbands).fill(Number.NaN);
  const high = new Float64Array(dataset.setups.length * subbands).fill(Number.NaN);
  let sum = 0;
  let used = 0;
  let highest = Number.NaN;
  dataset.setups.forEach((setup, index) => {
    for (let s = 0; s < subbands; s++) {
      const at = index * subbands + s;
      for (let c = s * channels; c < (s + 1) * channels; c++) {
        if (channelUsed[c] !== 1) continue;
        const frequency = setup.frequencies[c]!;
        if (!(low[at]! <= frequency)) low[at] = frequency;
        if (!(high[at]! >= frequency)) high[at] = frequency;
        if (!(highest >= frequency)) highest = frequency;
        sum += frequency;
        used += 1;
      }
    }
  });
  return { low, high, mean: used === 0 ? meanOf(dataset) : sum / used, highest };
}

function meanOf(dataset: Dataset): number {
  const all = dataset.setups.flatMap((setup) => [...setup.frequencies]);
  return all.reduce((sum, frequency) => sum + frequency, 0) / all.length;
}

function spacings(
  survey: Survey,
  products: Int32Array,
  field: number,
  range: FrequencyRange,
): { shortest: number; longest: number; extent: number } {
  const { dataset, tracks } = survey;
  const { subbands } = dataset.shape;
  const others = (survey.others?.rows ?? []).filter((rows) => rows.field === field);
  let longest = Number.NaN;
  let extent = Number.NaN;
  const each = (visit: (low: number, high: number, size: number) => void) => {
    for (let cell = 0; cell < tracks.cells; cell++) {
      if (tracks.field[cell] !== field) continue;
      const u = Math.abs(tracks.u[cell]!);
      const v = Math.abs(tracks.v[cell]!);
      const radius = Math.hypot(u, v);
      if (!Number.isFinite(radius)) continue;
      for (let s = 0; s < subbands; s++) {
        if (trackWeight(tracks, trackOffset(dataset, cell, s), products) === 0) continue;
        const at = tracks.setup[cell]! * subbands + s;
        visit(radius * range.low[at]!, radius * range.high[at]!, Math.max(u, v) * range.high[at]!);
      }
    }
  };
  each((_, high, size) => {
    if (!(longest >= high)) longest = high;
    if (!(extent >= size)) extent = size;
  });
  eachOther(others, dataset, products, (rows, k, at) => {
    const high = range.high[at]!;
    if (!(longest >= rows.longest[k]! * high) && rows.longest[k]! >= 0) longest = rows.longest[k]! * high;
    if (!(extent >= rows.extent[k]! * high) && rows.extent[k]! >= 0) extent = rows.extent[k]! * high;
  });
  let shortest = Number.NaN;
  each((low) => {
    if (low > longest * SAME_PLACE && !(shortest <= low)) shortest = low;
  });
  eachOther(others, dataset, products, (rows, k, at) => {
    for (const spacing of rows.shortest.subarray(k * OCTAVES, (k + 1) * OCTAVES)) {
      const low = spacing * range.low[at]!;
      if (low > longest * SAME_PLACE && !(shortest <= low)) shortest = low;
    }
  });
  return { shortest, longest, extent };
}

/** @param visit told of each product of the image k, and where the frequencies of its setup and sub-band are */
function eachOther(
  others: readonly OtherRows[],
  { shape }: Dataset,
  products: Int32Array,
  visit: (rows: OtherRows, k: number, at: number) => void,
): void {
  for (const rows of others) {
    for (let s = 0; s < shape.subbands; s++) {
      for (const product of products) {
        visit(rows, s * shape.polarizations + product, rows.setup * shape.subbands + s);
      }
    }
  }
}

function everySpacing(survey: Survey, field: number): { everShortest: number; everLongest: number } {
  const { dataset, tracks } = survey;
  let lowest = Number.POSITIVE_INFINITY;
  let highest = 0;
  for (const { frequencies } of dataset.setups) {
    for (const frequency of frequencies) {
      lowest = Math.min(lowest, frequency);
      highest = Math.max(highest, frequency);
    }
  }
  let longest = 0;
  const radii: number[] = [];
  for (let cell = 0; cell < tracks.cells; cell++) {
    const radius = Math.hypot(tracks.u[cell]!, tracks.v[cell]!);
    if (tracks.field[cell] !== field || !Number.isFinite(radius)) continue;
    radii.push(radius);
    longest = Math.max(longest, radius);
  }
  for (const rows of survey.others?.rows ?? []) {
    if (rows.field !== field || Number.isNaN(rows.everLongest)) continue;
    radii.push(...rows.everShortest.filter((radius) => radius >= 0));
    longest = Math.max(longest, rows.everLongest);
  }
  let shortest = Number.POSITIVE_INFINITY;
  for (const radius of radii) if (radius > longest * SAME_PLACE) shortest = Math.min(shortest, radius);
  return { everShortest: shortest * lowest, everLongest: longest * highest };
}
