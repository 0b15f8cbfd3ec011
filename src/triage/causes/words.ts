/** What each cause is called, how to make sure of it, and what cures it. */

import { formatArcsec, formatWavelengths } from "../../report/quantity.ts";
import type { Check } from "../../report/report.ts";
import type { ScopeWords } from "../../report/scope.ts";
import {
  formatAngle,
  formatDuration,
  formatFlux,
  formatFrequency,
  formatNumber,
  formatPercent,
} from "../../util/units.ts";
import { isExtended, isInside } from "../sky/look.ts";
import { widthsOf } from "../sky/patch.ts";
import type { Understanding } from "../sky/understand.ts";
import type { CauseKind } from "./cause.ts";
import type { FoundCause } from "./found.ts";
import { missedFraction } from "./imager-faults.ts";

export const CAUSE_TITLES: Readonly<Record<CauseKind, string>> = {
  baseline: "One baseline is off",
  interference: "Interference",
  "antenna-gain": "An antenna's amplitude is off",
  "antenna-phase": "An antenna's phase is off",
  "bad-samples": "An antenna's samples are off",
  "w-term": "The w term was not corrected",
  "bandwidth-smearing": "Channels too wide for the field",
  "time-smearing": "Integrations too long for the field",
  "missing-short-spacings": "Short spacings are missing",
  "outside-source": "A source outside the image",
};

export interface CauseWords {
  readonly title: string;
  /** sentences: what speaks for it */
  readonly evidence: readonly string[];
  /** a sentence: what would confirm it */
  readonly test: string;
  /** a sentence: what cures it, besides flags */
  readonly cure: string;
}

const DEGREES = 180 / Math.PI;

export function wordsOf(cause: FoundCause, seen: Understanding, check: Check, words: ScopeWords): CauseWords {
  const title = CAUSE_TITLES[cause.kind];
  return cause.samples === null
    ? { title, ...imagerWords(cause, seen, check) }
    : { title, ...sampleWords(cause, seen, words) };
}

function sampleWords(
  { kind, scope, samples }: FoundCause,
  seen: Understanding,
  words: ScopeWords,
): Omit<CauseWords, "title"> {
  const { candidate, members } = samples!;
  const where = scope === null ? "these samples" : words.scope(scope);
  const count = members.reduce((sum, one) => sum + one, 0);
  const { spacing, direction } = spacingOf(seen, members);
  const held = `The data, without the sources of the image, stand ${formatNumber(Math.sqrt(candidate.interval.mean))} times above their noise on ${where}.`;
  const lies = `Its samples lie at ${formatWavelengths(spacing)} in the uv plane: waves of ${formatAngle(1 / spacing)}.`;
  const gain = Math.hypot(1 + candidate.gainRe, candidate.gainIm);
  const turn = Math.atan2(candidate.gainIm, 1 + candidate.gainRe) * DEGREES;
  const without =
    "Make the image again without these samples (apply flags.json to a copy): what is wrong must go with them.";
  switch (kind) {
    case "baseline":
      return {
        evidence: [held, `${lies} They run ${formatNumber(direction)} deg from north through east.`],
        test: `${without} Closure phases with this baseline are off in the same time, those without it are not.`,
        cure: "Drop these samples; no calibration by antenna mends a single baseline.",
      };
    case "interference":
      return {
        evidence: [held, `${formatPercent(count / seen.atoms.count)} of all samples, on every baseline.`],
        test: `${without} An image of these channels alone shows it at its worst.`,
        cure: "Drop these channels over this time, or look for what is left of the interference beside them.",
      };
    case "antenna-gain":
      return {
        evidence: [
          held,
          `All its baselines fit one factor: the amplitude is ${formatNumber(gain)} times what it should be (phase ${formatNumber(turn)} deg).`,
        ],
        test: `${without} The closure amplitudes with this antenna stay: it is a factor of the antenna alone.`,
        cure: `Calibrate its amplitude over this time, by a factor of ${formatNumber(1 / gain)}, rather than drop it.`,
      };
    case "antenna-phase":
      return {
        evidence: [
          held,
          `All its baselines fit one turn: ${formatNumber(turn)} deg (amplitude ${formatNumber(gain)}).`,
        ],
        test: `${without} The closure phases with this antenna stay: it is a turn of the antenna alone.`,
        cure: `Calibrate its phase over this time, by ${formatNumber(-turn)} deg, rather than drop it.`,
      };
    default:
      return {
        evidence: [held, "No single factor of gain or phase accounts for it."],
        test: without,
        cure: "Look at its phases and amplitudes over this time: calibrate in shorter steps, or drop it.",
      };
  }
}

/** Median spacing of samples, wavelengths, and the direction of their mean, degrees from north through east. */
function spacingOf({ atoms }: Understanding, members: Uint8Array): { spacing: number; direction: number } {
  const spacings: number[] = [];
  let [u, v] = [0, 0];
  for (let k = 0; k < atoms.count; k++) {
    if (members[k] === 0) continue;
    spacings.push(Math.hypot(atoms.u[k]!, atoms.v[k]!));
    u += atoms.u[k]!;
    v += atoms.v[k]!;
  }
  spacings.sort((a, b) => a - b);
  return {
    spacing: spacings[spacings.length >> 1] ?? Number.NaN,
    direction: (Math.atan2(u, v) * DEGREES + 360) % 180,
  };
}

function imagerWords(
  { kind, imager }: FoundCause,
  seen: Understanding,
  { image: forecast, plan }: Check,
): Omit<CauseWords, "title"> {
  const { amplitude, sigmas, height } = imager!;
  const size = amplitude / seen.scale;
  const fitted = `What it does to the sources of the image, predicted from the samples, is in the image at ${formatNumber(size)} times its predicted size (${formatNumber(sigmas)} sigma; up to ${formatNumber(height / seen.noise)} times the noise).`;
  const farthest = Math.max(
    ...seen.sources.filter((one) => isInside(seen, one)).map(({ l, m }) => Math.hypot(l, m)),
    0,
  );
  const out = `The outermost source lies ${formatAngle(farthest)} from the centre.`;
  const field = formatAngle(plan.fieldOfView.value);
  switch (kind) {
    case "w-term":
      return {
        evidence: [fitted, out],
        test: "Move the phase centre to the outermost source and make a small image there: it becomes a point, and its rings go.",
        cure: `Make the image with a w correction; the planned field of ${field} needs ${forecast.wTerm.planes} planes, or ${forecast.wTerm.facets} facets. Flags do not help.`,
      };
    case "bandwidth-smearing":
      return {
        evidence: [fitted, out],
        test: "Compare the widths of sources: they grow with distance, along the direction to the centre and not across it.",
        cure: `Make the image from data averaged less in frequency: channels of ${formatFrequency(forecast.smearing.safeChannelHz)} are safe over the planned field of ${field}. Averaged data do not give it back.`,
      };
    case "time-smearing":
      return {
        evidence: [fitted, out],
        test: "Compare the widths of sources: they grow with distance, around the centre and not towards it.",
        cure: `Make the image from data averaged less in time: integrations of ${formatDuration(forecast.smearing.safeIntegrationSeconds)} are safe over the planned field of ${field}. Averaged data do not give it back.`,
      };
    case "outside-source":
      return { evidence: [fitted, ...outsideWords(seen)], ...OUTSIDE };
    default:
      return {
        evidence: [fitted, ...missedWords(seen)],
        ...missedAdvice(forecast.coverage.before.shortestSpacingWavelengths),
      };
  }
}

const OUTSIDE = {
  test: "Make a larger image, or a small one at that place: the source is there, and taking it out takes its sidelobes out of this one.",
  cure: "Make the image large enough to hold it, or subtract it from the data first.",
} as const;

function outsideWords(seen: Understanding): string[] {
  return seen.sources
    .filter((source) => !isInside(seen, source))
    .map(
      ({ flux, l, m }) =>
        `The data hold a source of ${formatFlux(flux)} at ${formatAngle(Math.abs(l))} ${l < 0 ? "west" : "east"}, ${formatAngle(Math.abs(m))} ${m < 0 ? "south" : "north"} of the image's centre, outside it.`,
    );
}

function missedWords(seen: Understanding): string[] {
  return seen.sources.filter(isExtended).map((source) => {
    const { major } = widthsOf(source.shape);
    const missed = missedFraction(source, seen.sampling.shortest);
    return `The short spacings fit emission ${formatAngle(major)} across, of ${formatFlux(source.flux)} if it is Gaussian; the shortest, ${formatWavelengths(seen.sampling.shortest)}, misses ${formatPercent(missed)} of that.`;
  });
}

function missedAdvice(shortest: number): { test: string; cure: string } {
  const largest = formatArcsec((0.6 / shortest) * DEGREES * 3600);
  return {
    test: "Leave out the shortest of the spacings that are there: the hollow must deepen.",
    cure: `Add shorter spacings, or the map of a single dish; else deconvolve with a scale for this emission, and say nothing of structure beyond ${largest}. Flags do not help.`,
  };
}
