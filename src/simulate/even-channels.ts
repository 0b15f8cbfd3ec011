/** Channels that a start and a width describe. */
import type { Dataset, Setup } from "../dataset/dataset.ts";
import { direction } from "../dataset/fits-idi/small-tables.ts";
import { unfit } from "./stokes-axis.ts";

/** Of a channel's width, that its centre may lie beside an even grid. */
const UNEVEN = 1e-3;

/** @throws InputError when channels are not evenly spaced by their width */
export function requireEvenChannels(dataset: Dataset, setup: Setup): void {
  const { subbands, channels } = dataset.shape;
  for (let subband = 0; subband < subbands; subband++) {
    const width = setup.channelWidths[subband]!;
    const step = width * direction(setup, subband, channels);
    const at = subband * channels;
    for (let channel = 1; channel < channels; channel++) {
      const off = setup.frequencies[at + channel]! - setup.frequencies[at]! - channel * step;
      if (Math.abs(off) <= UNEVEN * width) continue;
      throw unfit(
        dataset,
        `channel ${channel} of sub-band ${subband} is ${off} Hz off the grid of its channel widths`,
        "evenly spaced channels without gaps",
      );
    }
  }
}
