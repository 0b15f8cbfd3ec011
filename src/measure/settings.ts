/**
 * What a survey fixes before it begins, from the dataset alone, so that every partition of the rows shares it: the
 * typical power that centres the sketches, how many channels share one, and the width of the time bins.
 */
import type { Dataset } from "../dataset/dataset.ts";
import { exactQuantum } from "../util/exact-sum.ts";
import { median } from "../util/statistics.ts";
import { BUCKETS } from "./buckets.ts";

export interface SurveySettings {
  /** first raw buckets of the sketches of power and of squared differences */
  readonly typicalPower: number;
  /** groups of neighbouring channels of a sub-band that share a sketch, 1..channels */
  readonly channelGroups: number;
  /** segments of a sub-band that each have a noise of their own, so that a few bad channels do not raise it */
  readonly noiseSegments: number;
  /** one row in this many goes to the noise: a median needs hundreds of differences, not all there are */
  readonly noiseEvery: number;
  /** false where not even one sketch a baseline fits: baselines then share that of their lower antenna */
  readonly sketchByBaseline: boolean;
  /** 0: a track cell is one row; else seconds of a time bin */
  readonly binSeconds: number;
  /** a power of two; sums that cross rows add multiples of it */
  readonly sumQuantum: number;
}

export const DEFAULT_MEMORY = 512 * 2 ** 20;

/** Rows at the beginning, middle and end of the dataset that set the scales. */
const PROBE_ROWS = 64;
const NOISE_SEGMENTS = 8;
/** Second differences that the noise of a segment of a baseline is measured from: its median is then good to 4 %. */
const DIFFERENCES = 1024;
/** Bytes of a track cell's row columns, and of each of its products. */
const CELL_BYTES = 80;
const PRODUCT_BYTES = 44;

/** @param memory bytes that the survey's state may take, about half for the sketches and half for the tracks */
export async function settleSurvey(dataset: Dataset, memory = DEFAULT_MEMORY): Promise<SurveySettings> {
  const probe = await probeDataset(dataset);
  const { subbands, channels, polarizations } = dataset.shape;
  const antennas = Math.max(2, Math.min(dataset.array.antennas.length, 4096));
  const baselines = Math.max(1, Math.min((antennas * (antennas - 1)) / 2, dataset.rows));
  const sketchBytes = 4 * BUCKETS * subbands * polarizations;
  const most = Math.min(channels, NOISE_SEGMENTS);
  const fitting = Math.floor(memory / 2 / (sketchBytes * baselines)) - most;
  const cellBytes = CELL_BYTES + PRODUCT_BYTES * subbands * polarizations;
  const overflow = Math.ceil((dataset.rows * cellBytes) / (memory / 2));
  return {
    typicalPower: probe.power,
    channelGroups: Math.max(1, Math.min(channels, fitting)),
    noiseEvery: Math.max(1, Math.floor(((dataset.rows / baselines) * ((2 * channels) / most)) / DIFFERENCES)),
    noiseSegments: fitting >= 1 ? most : 1,
    sketchByBaseline: fitting >= 1,
    binSeconds: overflow <= 1 ? 0 : overflow * probe.integration,
    // The probe has not seen the largest term: leave room for one a thousand times as large.
    sumQuantum: exactQuantum(1024 * probe.largestSum * channels, dataset.rows),
  };
}

interface Probe {
  power: number;
  integration: number;
  largestSum: number;
}

async function probeDataset(dataset: Dataset): Promise<Probe> {
  const powers: number[] = [];
  const integrations: number[] = [];
  let largestSum = 0;
  const last = Math.max(0, dataset.rows - PROBE_ROWS);
  for (const first of new Set([0, Math.floor(last / 2), last])) {
    const rows: [number, number] = [first, Math.min(dataset.rows, first + PROBE_ROWS)];
    if (rows[0] >= rows[1]) continue;
    for await (const block of dataset.blocks({ want: "samples", rows })) {
      const samples = (block.rows * block.weight.length) / Math.max(1, block.time.length);
      for (let row = 0; row < block.rows; row++) integrations.push(block.integration[row]!);
      for (let i = 0; i < samples; i++) {
        const weight = block.weight[i]!;
        const power = block.real[i]! ** 2 + block.imag[i]! ** 2;
        if (
          !(weight > 0 && weight < Number.POSITIVE_INFINITY && power > 0 && power < Number.POSITIVE_INFINITY)
        )
          continue;
        powers.push(power);
        largestSum = Math.max(largestSum, weight * Math.max(1, Math.sqrt(power), power));
      }
    }
  }
  const integration = median(integrations.filter((seconds) => seconds > 0));
  return { power: median(powers), integration: integration > 0 ? integration : 10, largestSum };
}
