/** One game: an image is made, triage looks at it, and what it says is held against the truth. */
import { mkdtemp, rm } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { surveyDataset } from "../../../src/measure/survey.ts";
import type { CauseKind } from "../../../src/triage/causes/cause.ts";
import { type FoundCause, foundCauses } from "../../../src/triage/causes/found.ts";
import { readSkyImage } from "../../../src/triage/image/sky-image.ts";
import { investigate } from "../../../src/triage/investigate.ts";
import { type Case, type Game, type ImageKind, imageOf } from "./cases.ts";
import { writeImage } from "./image-file.ts";

export interface Score {
  readonly seed: number;
  /** what was ranked first; null: nothing is blamed */
  readonly first: CauseKind | null;
  /** the right cause first; of a clean image: nothing blamed */
  readonly right: boolean;
  /** the samples at fault named: baseline, antenna, channel and time; null where the cause has none */
  readonly located: boolean | null;
  /** intersection over union of the times; NaN where the fault has no time */
  readonly overlap: number;
  /** share of the power beyond noise that the first cause accounts for; NaN without one */
  readonly share: number;
  /** greatest height of what is wrong, in the noise of the image, by the truth */
  readonly height: number;
  readonly blamed: readonly CauseKind[];
}

/** Times agree where they share this much of what either has. */
const LEAST_OVERLAP = 0.7;

export async function play(of: Case, seed: number, kind: ImageKind): Promise<Score> {
  const game = of.make(seed);
  const pixels = await imageOf(game, kind);
  const folder = await mkdtemp(join(tmpdir(), "visvet-triage-"));
  try {
    const path = join(folder, "image.fits");
    const field = game.simulated.dataset.fields[0]!;
    writeImage(path, pixels, game.grid, field, kind === "restored" ? game.beam : undefined);
    const survey = await surveyDataset(game.simulated.dataset, {});
    const { seen, ranking } = await investigate(survey, await readSkyImage(path));
    const causes = foundCauses(seen, ranking);
    return scoreOf(game, seed, causes, stripeHeight(game, seen.noise));
  } finally {
    await rm(folder, { recursive: true });
  }
}

function scoreOf(game: Game, seed: number, causes: readonly FoundCause[], height: number): Score {
  const { truth } = game;
  const first = causes[0];
  const overlap = overlapOf(truth.time, first?.scope?.time ?? null, game);
  return {
    seed,
    first: first?.kind ?? null,
    right: (first?.kind ?? null) === truth.cause,
    located: locatedIn(game, first, overlap),
    overlap,
    share: first?.share ?? Number.NaN,
    height,
    blamed: causes.map(({ kind }) => kind),
  };
}

function locatedIn({ truth }: Game, first: FoundCause | undefined, overlap: number): boolean | null {
  if (truth.baseline === undefined && truth.antenna === undefined && truth.channel === undefined) return null;
  const scope = first?.scope ?? null;
  if (scope === null) return false;
  const timed = truth.time === undefined || overlap >= LEAST_OVERLAP;
  if (truth.baseline !== undefined) {
    const [pair] = scope.baselines ?? [];
    return scope.baselines?.length === 1 && String(pair) === String(truth.baseline) && timed;
  }
  if (truth.antenna !== undefined) return String(scope.antennas) === String([truth.antenna]) && timed;
  return String(scope.channels) === String([[truth.channel, truth.channel]]);
}

function overlapOf(
  truth: readonly [number, number] | undefined,
  found: readonly [number, number] | null,
  { simulated }: Game,
): number {
  if (truth === undefined) return Number.NaN;
  const { times } = simulated.truth.observation;
  const [low, high] = found ?? [times[0]!, times.at(-1)!];
  const step = times[1]! - times[0]!;
  const common = Math.min(high, truth[1]) - Math.max(low, truth[0]) + step;
  const either = Math.max(high, truth[1]) - Math.min(low, truth[0]) + step;
  return Math.max(0, common) / either;
}

/**
 * Height of the stripe that one baseline makes at its stretch of time, at most, over the noise of the image: the share of
 * its samples times the size of what they are off by. 0 for other faults.
 */
function stripeHeight({ simulated, truth, sources }: Game, noise: number): number {
  const [fault] = simulated.truth.faults;
  if (truth.baseline === undefined || truth.time === undefined || fault === undefined) return 0;
  const { times, baselines } = simulated.truth.observation;
  const inside = times.filter((time) => time >= truth.time![0] && time <= truth.time![1]).length;
  const share = inside / times.length / baselines;
  const off =
    fault.kind === "baseline-phase"
      ? 2 * Math.abs(Math.sin((fault.size * Math.PI) / 360))
      : Math.abs(fault.size - 1);
  // The sources beat against each other: what counts is their rms.
  const flux = Math.sqrt(sources.reduce((sum, source) => sum + source.flux ** 2, 0));
  return (share * off * flux) / noise;
}
