/** The causes that account for what is wrong with an image, the one that accounts for most first. */
import { fitToData } from "../sky/fit-data.ts";
import { imageOf } from "../sky/look.ts";
import type { Visibilities } from "../sky/model.ts";
import { restOf } from "../sky/solve-sources.ts";
import type { Understanding } from "../sky/understand.ts";
import { type Candidate, findCandidates, holds, lookedAtAgain, touchesOf } from "./candidate.ts";
import { type Evidence, excessOf, gatherEvidence, shareOf, withRest } from "./evidence.ts";
import { type Predicted, predictImagerFaults } from "./imager-faults.ts";
import { narrowed } from "./narrow.ts";

/** Samples at fault. */
export interface SampleFault {
  readonly candidate: Candidate;
  /** bins of the channels at fault, first and last; null: all of them alike */
  readonly channels: readonly (readonly [number, number])[] | null;
  /** (atoms) 1 where the cause holds a sample */
  readonly members: Uint8Array;
  /** of what is wrong with the image */
  readonly share: number;
}

export interface Ranking {
  readonly evidence: Evidence;
  readonly sampleFaults: readonly SampleFault[];
  /** at fault in the data, though the image hardly shows it */
  readonly minor: readonly SampleFault[];
  readonly imagerFaults: readonly Predicted[];
  /** all that were predicted, accepted or not */
  readonly predicted: readonly Predicted[];
}

const MOST_CAUSES = 6;
/** Of what is wrong beyond noise, and of the whole power of the image without its sources. */
const LEAST_SHARE = 0.05;
const LEAST_OF_POWER = 0.02;
/** A set of samples is preferred to a larger one that accounts for no more than this much more. */
const AS_GOOD = 0.7;
/** Sigmas that an imager's fault must have in the image, and how near to the predicted size it must be. */
const LEAST_SIGMAS = 6;
const AMPLITUDES = [0.4, 2.5] as const;
/** Its pattern reaches this many times the noise of the image somewhere: below that nobody sees it. */
const LEAST_HEIGHT = 1.5;

export function rankCauses(seen: Understanding): Ranking {
  const evidence = gatherEvidence(seen);
  const enough = (share: number) =>
    share >= LEAST_SHARE && share * excessOf(evidence) >= LEAST_OF_POWER * evidence.power;
  const found = seen.held ? findSampleFaults(evidence) : [];
  const sampleFaults = found.filter(({ share }) => enough(share)).sort((a, b) => b.share - a.share);
  const { accepted, others } = predictImagerFaults(
    evidence,
    withoutSamples(evidence, sampleFaults),
    ({ amplitude, sigmas, share, height }) => {
      const size = amplitude / seen.scale;
      const right = size > AMPLITUDES[0] && size < AMPLITUDES[1];
      return right && sigmas >= LEAST_SIGMAS && enough(share) && !(height < LEAST_HEIGHT * seen.noise);
    },
  );
  return {
    evidence,
    sampleFaults,
    minor: found.filter(({ share }) => !enough(share)),
    imagerFaults: accepted,
    predicted: [...accepted, ...others],
  };
}

/** The image without its sources and without what samples at fault put into it. */
function withoutSamples({ seen }: Evidence, faults: readonly SampleFault[]): Float64Array {
  if (faults.length === 0) return seen.residual;
  const members = (k: number) => faults.some((fault) => fault.members[k] === 1);
  const only = (values: Float64Array) => values.map((value, k) => (members(k) ? seen.scale * value : 0));
  const added = imageOf(seen, { re: only(seen.rest.re), im: only(seen.rest.im) });
  const { left } = seen.projector.take(added);
  return seen.residual.map((value, i) => value - left[i]!);
}

/** One after the other: the likeliest is taken out of the data, and the sources fitted anew without it. */
function findSampleFaults(first: Evidence): SampleFault[] {
  const { seen } = first;
  const { atoms } = seen;
  const free = new Uint8Array(atoms.count).fill(1);
  const found: SampleFault[] = [];
  let evidence = first;
  let rest = seen.rest;
  for (let round = 0; round < MOST_CAUSES; round++) {
    const judged = findCandidates(seen, rest, free).map((candidate) => {
      const members = membersOf(seen, candidate, free);
      const count = members.reduce((sum, one) => sum + one, 0);
      return { candidate, count, share: shareOf(evidence, (k) => members[k] === 1) };
    });
    if (!judged.some(({ share }) => share > 0)) break;
    const most = Math.max(...judged.map(({ share }) => share));
    const good = judged.filter(({ share }) => share >= AS_GOOD * most || share === most);
    const { candidate: likeliest } = good.reduce((least, one) => (one.count < least.count ? one : least));
    // Sources that its samples had no part in tell its time and size better.
    const touches = touchesOf(seen, likeliest);
    rest = refitted(seen, (k) => free[k] === 1 && !touches(k));
    const candidate = lookedAtAgain(seen, rest, free, likeliest);
    const { channels, members } = narrowed(seen, rest, candidate, membersOf(seen, candidate, free));
    evidence = withRest(first, rest);
    found.push({ candidate, channels, members, share: shareOf(evidence, (k) => members[k] === 1) });
    for (let k = 0; k < atoms.count; k++) if (members[k] === 1) free[k] = 0;
    rest = refitted(seen, (k) => free[k] === 1);
    evidence = withRest(first, rest);
  }
  return found;
}

function membersOf(seen: Understanding, candidate: Candidate, free: Uint8Array): Uint8Array {
  const inside = holds(seen, candidate);
  return free.map((one, k) => (one === 1 && inside(k) ? 1 : 0));
}

/** The data less the sources as the samples that are free of faults give them. */
function refitted(seen: Understanding, free: (k: number) => boolean): Visibilities {
  const { atoms, sources, frame, beam } = seen;
  if (sources.length === 0) return seen.rest;
  const weight = atoms.weight.map((value, k) => (free(k) ? value : 0));
  // With no more than half of the samples, no sources are told.
  const left = weight.reduce((count, value) => count + (value > 0 ? 1 : 0), 0);
  if (left < atoms.count / 2) return seen.rest;
  const request = {
    atoms: { ...atoms, weight },
    declination: frame.declination,
    beam: beam.major,
    rounds: 1,
  };
  return restOf(atoms, fitToData(sources, request).sources, frame.declination);
}
