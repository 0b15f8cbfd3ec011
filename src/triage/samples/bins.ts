/** Which integrations and channels share an atom. Follows from the sizes of the dataset alone. */
import type { Sampling } from "../../imaging/sampling.ts";
import { nearestTime } from "../../measure/times.ts";

export interface Bins {
  readonly times: number;
  /** (times) MJD of the first and the last integration of each bin */
  readonly start: Float64Array;
  readonly end: Float64Array;
  /** seconds that an atom lasts, typically */
  readonly duration: number;
  readonly channels: number;
  /** (subbands x channels) bin of each channel, -1 where it is left out */
  readonly channelOf: Int32Array;
  /** (channels) first and last channel of each bin, counted over all sub-bands */
  readonly firstChannel: Int32Array;
  readonly lastChannel: Int32Array;
  /** (channels) Hz that an atom is wide */
  readonly width: Float64Array;
  /** seconds and (channels) Hz of one sample: what smears in the data themselves */
  readonly integration: number;
  readonly channelWidth: Float64Array;
  /** bin of the integration nearest to a time, MJD; -1 where there is none */
  readonly timeOf: (mjd: number) => number;
}

/** Atoms held at most: 80 bytes each. */
const MOST_ATOMS = 1_500_000;
const LEAST_TIMES = 24;

export function binsOf(
  sampling: Sampling,
  frequencies: { readonly low: number; readonly high: number } | null,
): Bins {
  const { survey } = sampling;
  const baselines = Math.max(1, survey.baselines.length);
  const used = usedChannels(sampling, frequencies);
  const times = survey.times;
  let [perTime, perChannel] = [1, 1];
  const bins = (per: number, length: number) => Math.max(1, Math.ceil(length / per));
  while (baselines * bins(perTime, times.length) * bins(perChannel, used.length) > MOST_ATOMS) {
    // The longer of the two gives way, but times to no fewer than tell when something happened.
    const manyTimes = bins(perTime, times.length);
    if (manyTimes > LEAST_TIMES && manyTimes >= 2 * bins(perChannel, used.length)) perTime += 1;
    else if (bins(perChannel, used.length) > 1) perChannel += 1;
    else perTime += 1;
  }
  return { ...timeBins(times, perTime, survey.integration), ...channelBins(sampling, used, perChannel) };
}

function usedChannels(
  { survey, channelUsed }: Sampling,
  frequencies: { readonly low: number; readonly high: number } | null,
): number[] {
  const all = Array.from(channelUsed.keys()).filter((c) => channelUsed[c] === 1);
  if (frequencies === null) return all;
  const within = all.filter((c) =>
    survey.dataset.setups.some(
      ({ frequencies: nu }) => nu[c]! >= frequencies.low && nu[c]! <= frequencies.high,
    ),
  );
  // A plane of other frequencies than the data's: the header counts them otherwise, so nothing is left out.
  return within.length > 0 ? within : all;
}

function timeBins(
  times: Float64Array,
  per: number,
  integration: number,
): Pick<Bins, "times" | "start" | "end" | "duration" | "integration" | "timeOf"> {
  const count = Math.max(1, Math.ceil(times.length / per));
  const start = Float64Array.from({ length: count }, (_, i) => times[i * per] ?? Number.NaN);
  const end = Float64Array.from(
    { length: count },
    (_, i) => times[Math.min(times.length, (i + 1) * per) - 1] ?? Number.NaN,
  );
  return {
    times: count,
    start,
    end,
    duration: integration * per,
    integration,
    timeOf: (mjd) => {
      const nearest = nearestTime(times, mjd);
      return nearest < 0 ? -1 : Math.floor(nearest / per);
    },
  };
}

function channelBins(
  { survey }: Sampling,
  used: readonly number[],
  per: number,
): Omit<Bins, "times" | "start" | "end" | "duration" | "integration" | "timeOf"> {
  const { dataset } = survey;
  const channelOf = new Int32Array(dataset.shape.subbands * dataset.shape.channels).fill(-1);
  const channels = Math.max(1, Math.ceil(used.length / per));
  const firstChannel = new Int32Array(channels);
  const lastChannel = new Int32Array(channels);
  const width = new Float64Array(channels);
  const channelWidth = new Float64Array(channels);
  used.forEach((c, i) => {
    const bin = Math.floor(i / per);
    channelOf[c] = bin;
    if (i % per === 0) firstChannel[bin] = c;
    lastChannel[bin] = c;
    const own = dataset.setups[0]?.channelWidths[Math.floor(c / dataset.shape.channels)] ?? 0;
    channelWidth[bin] = own;
    width[bin]! += own;
  });
  return { channels, channelOf, firstChannel, lastChannel, width, channelWidth };
}
