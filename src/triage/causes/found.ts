/** The causes of a bad image as what they are and which samples they concern: the one that accounts for most first. */
import { EVERYTHING, type Selection } from "../../dataset/selection.ts";
import type { Understanding } from "../sky/understand.ts";
import type { CauseKind } from "./cause.ts";
import type { Predicted } from "./imager-faults.ts";
import type { Ranking, SampleFault } from "./rank.ts";

export interface FoundCause {
  readonly kind: CauseKind;
  /** of what is wrong with the image beyond its noise, 0..1 */
  readonly share: number;
  /** the samples at fault; null where no samples are */
  readonly scope: Selection | null;
  readonly samples: SampleFault | null;
  readonly imager: Predicted | null;
}

export function foundCauses(seen: Understanding, ranking: Ranking): FoundCause[] {
  const causes = [
    ...ranking.sampleFaults.map((fault) => causeOf(seen, fault)),
    ...ranking.imagerFaults.map((imager): FoundCause => {
      return { kind: imager.kind, share: bounded(imager.share), scope: null, samples: null, imager };
    }),
  ];
  return causes.sort((a, b) => b.share - a.share);
}

function bounded(share: number): number {
  return Math.max(0, Math.min(1, share));
}

/** An antenna whose samples are off by one factor, at least this share of what they are off by. */
const LEAST_STRUCTURED = 0.3;

export function causeOf(seen: Understanding, fault: SampleFault): FoundCause {
  return {
    kind: kindOf(fault),
    share: bounded(fault.share),
    scope: scopeOf(seen, fault),
    samples: fault,
    imager: null,
  };
}

function kindOf({ candidate }: SampleFault): CauseKind {
  const { kind, gainRe, gainIm, structured } = candidate;
  if (kind === "baseline") return "baseline";
  if (kind === "channel") return "interference";
  if (structured < LEAST_STRUCTURED) return "bad-samples";
  const gain = Math.hypot(1 + gainRe, gainIm);
  const phase = Math.abs(Math.atan2(gainIm, 1 + gainRe));
  return Math.abs(Math.log(Math.max(gain, 1e-3))) >= phase ? "antenna-gain" : "antenna-phase";
}

function scopeOf({ atoms, sampling }: Understanding, { candidate, channels }: SampleFault): Selection {
  const { survey } = sampling;
  const { bins } = atoms;
  const { first, last } = candidate.interval;
  const whole = first === 0 && last === bins.times - 1;
  const baseline = survey.baselines[candidate.which];
  return {
    ...EVERYTHING,
    antennas: candidate.kind === "antenna" ? [candidate.which] : null,
    baselines:
      candidate.kind === "baseline" && baseline !== undefined
        ? [[baseline.antenna1, baseline.antenna2]]
        : null,
    time: whole ? null : [bins.start[first]!, bins.end[last]!],
    fields: survey.dataset.fields.length > 1 ? [sampling.field.id] : null,
    ...channelScope(channels, bins, survey.dataset.shape),
  };
}

/** Channel bins count over all sub-bands; a selection has channels within each sub-band that it names. */
function channelScope(
  ranges: SampleFault["channels"],
  { firstChannel, lastChannel }: Understanding["atoms"]["bins"],
  shape: { readonly subbands: number; readonly channels: number },
): Pick<Selection, "subbands" | "channels"> {
  if (ranges === null) return { subbands: null, channels: null };
  const bySubband = new Map<number, [number, number][]>();
  for (const [low, high] of ranges) {
    const [from, to] = [firstChannel[low]!, lastChannel[high]!];
    for (let s = Math.floor(from / shape.channels); s <= Math.floor(to / shape.channels); s++) {
      const start = Math.max(0, from - s * shape.channels);
      const end = Math.min(shape.channels - 1, to - s * shape.channels);
      bySubband.set(s, [...(bySubband.get(s) ?? []), [start, end]]);
    }
  }
  const lists = [...bySubband.values()].map((list) => JSON.stringify(list));
  const alike = new Set(lists).size === 1;
  const subbands = shape.subbands === 1 ? null : [...bySubband.keys()];
  // Sub-bands with channels of their own each cannot be said in one selection: all of the ranges, in all of them.
  return { subbands, channels: alike ? [...bySubband.values()][0]! : [...bySubband.values()].flat() };
}
