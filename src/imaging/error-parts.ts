/** An error cut into parts on which it is the same: one, or for a delay one a group of channels. */
import type { Selection } from "../dataset/selection.ts";
import type { EventError } from "./event-errors.ts";
import type { Sampling } from "./sampling.ts";
import { sinc } from "./smearing.ts";

export interface ErrorPart {
  readonly scope: Selection;
  /** see EventError */
  readonly real: number;
  readonly imaginary: number;
}

/** Groups of channels in one turn of a delay's phase. */
const GROUPS_A_TURN = 16;
/** Groups in all sub-bands together, as far as their number allows. */
const MOST_GROUPS = 64;

export function errorParts(sampling: Sampling, scope: Selection, error: EventError): ErrorPart[] {
  const { real, imaginary, delay } = error;
  return delay === 0 ? [{ scope, real, imaginary }] : delayParts(sampling, scope, delay);
}

/** @param delay seconds; the phase is 0 in the middle of each sub-band */
function delayParts({ survey, channelUsed }: Sampling, scope: Selection, delay: number): ErrorPart[] {
  const { shape, setups } = survey.dataset;
  const { channels, subbands } = shape;
  // Setups differ in where their sub-bands lie, hardly in their widths, on which alone a delay acts.
  const { frequencies, channelWidths } = setups[0]!;
  return Array.from({ length: subbands }, (_, s) => s).flatMap((s) => {
    if (scope.subbands !== null && !scope.subbands.includes(s)) return [];
    const used = Array.from({ length: channels }, (_, c) => c).filter(
      (c) => channelUsed[s * channels + c] === 1,
    );
    if (used.length === 0) return [];
    const at = (c: number) => frequencies[s * channels + c]!;
    const middle = (at(used[0]!) + at(used.at(-1)!)) / 2;
    const width = Math.abs(at(used.at(-1)!) - at(used[0]!)) + channelWidths[s]!;
    const most = Math.max(1, Math.floor(MOST_GROUPS / subbands));
    const count = Math.min(used.length, most, Math.max(4, Math.ceil(GROUPS_A_TURN * delay * width)));
    return Array.from({ length: count }, (_, g): ErrorPart => {
      const members = used.slice(
        Math.floor((g * used.length) / count),
        Math.floor(((g + 1) * used.length) / count),
      );
      const [low, high] = [members[0]!, members.at(-1)!];
      const turns = delay * ((at(low) + at(high)) / 2 - middle);
      const kept = sinc((delay * width) / count);
      return {
        scope: { ...scope, subbands: [s], channels: within(scope.channels, low, high) },
        real: kept * Math.cos(2 * Math.PI * turns) - 1,
        imaginary: kept * Math.sin(2 * Math.PI * turns),
      };
    });
  });
}

function within(ranges: Selection["channels"], low: number, high: number): [number, number][] {
  return (ranges ?? [[low, high]])
    .map(([first, last]): [number, number] => [Math.max(first, low), Math.min(last, high)])
    .filter(([first, last]) => first <= last);
}
