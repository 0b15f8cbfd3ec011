/**
 * What a survey fixes before it begins, from the sizes of the dataset alone, so that every partition of the rows shares
 * it without having read any.
 */
import type { Dataset } from "../dataset/dataset.ts";
import { MOST_BASELINES } from "./even-choice.ts";
import { DEFAULT_MEMORY, surveyMemory } from "./memory.ts";

export interface SurveySettings {
  /** bytes that the sketches may take before channels share them */
  readonly sketchBytes: number;
  /** bytes that the tracks may take before time bins replace integrations */
  readonly trackBytes: number;
  /** how many there will be, at most, as far as the antennas tell */
  readonly baselines: number;
  readonly antennas: number;
  /** there may be so many baselines that only an even choice of them is looked at one by one */
  readonly thins: boolean;
  /** one sketch a baseline would not fit, not even with all its samples in it: antennas own the sketches */
  readonly sharedSketches: boolean;
  /** the same for the noise: also where a baseline has too few differences between channels to tell its own */
  readonly sharedNoise: boolean;
  /** 1 row in this many, a power of two, is asked for its noise: more would make it no better */
  readonly noiseEvery: number;
  /** of those 1 in this many, a power of two, is asked for the noise of each channel */
  readonly channelEvery: number;
  /** of those asked for their noise 1 in this many, a power of two, is asked whether its channels were smoothed */
  readonly spansEvery: number;
}

/** Differences between channels that the noise of a baseline needs: its median is then good to 1/90. */
const ENOUGH_OF_BASELINE = 1 << 12;
/** The same for the noise of a channel, over all baselines: its median is then good to 1/125. */
const ENOUGH_OF_CHANNEL = 1 << 13;
/** The same for the comparison of spans, over all baselines. */
const ENOUGH_OF_SPANS = 1 << 17;
const MOST_SPARING = 64;
/** Differences too few for a baseline's noise, and enough for an antenna's. */
const FEW_OF_BASELINE = 5;
const ENOUGH_OF_ANTENNA = 200;
/** What the kernels' memory has room for beside the rest. */
const MOST_SKETCH_BYTES = 800e6;
/** Of the sketches of one baseline, of amplitudes and of noise, each with few pages. */
const LEAST_BYTES = 2500;

/** @param memory bytes that the survey's state may take, half for the sketches and half for the tracks */
export function settleSurvey(dataset: Dataset, memory = surveyMemory(DEFAULT_MEMORY)): SurveySettings {
  const antennas = Math.max(2, dataset.array.antennas.length);
  const baselines = Math.max(1, Math.min((antennas * (antennas - 1)) / 2, dataset.rows));
  const differences = dataset.rows * dataset.shape.channels;
  const shared = baselines > MOST_BASELINES || baselines * LEAST_BYTES > memory / 2;
  const { channels } = dataset.shape;
  // Second differences, of which a row has two fewer than channels.
  const told = dataset.rows * (channels < 3 ? channels - 1 : channels - 2);
  const onlyAntennasTell = told < FEW_OF_BASELINE * baselines && told > ENOUGH_OF_ANTENNA * antennas;
  const noiseEvery = sparing(differences / baselines / ENOUGH_OF_BASELINE);
  return {
    sketchBytes: Math.min(memory / 2, MOST_SKETCH_BYTES),
    trackBytes: memory / 2,
    baselines,
    antennas,
    thins: baselines > MOST_BASELINES,
    sharedSketches: shared,
    sharedNoise: shared || onlyAntennasTell,
    noiseEvery,
    channelEvery: sparing(dataset.rows / noiseEvery / ENOUGH_OF_CHANNEL),
    spansEvery: sparing(differences / noiseEvery / ENOUGH_OF_SPANS),
  };
}

/** The power of two at or below a surplus. */
function sparing(surplus: number): number {
  return 2 ** Math.floor(Math.log2(Math.min(MOST_SPARING, Math.max(1, surplus))));
}
