/** Features as events, in numbers and words. */
import { SECONDS_PER_DAY, SPEED_OF_LIGHT } from "../../util/constants.ts";
import type { DetectedEvent } from "../event.ts";
import { ELEVATED_SHARE } from "../pass/marks.ts";
import type { DetectRequest } from "../request.ts";
import { amplitudeOf } from "./amplitude.ts";
import { usableOf } from "./extent.ts";
import type { Feature } from "./features.ts";
import type { Grid } from "./grid.ts";
import { channelsOf } from "./group.ts";
import { liesInProtected } from "./protect.ts";
import { scopeOf, selectionsOf } from "./selections.ts";

const CAUSES = { "persistent-line": "channels", "drifting-line": "channels", burst: "time" } as const;
/** Confidence in a flag where the plan looks for lines and this is one. */
const DOUBTFUL_LINE = 0.3;

export function eventOf(grid: Grid, request: DetectRequest, feature: Feature): DetectedEvent {
  const [flag, ...others] = selectionsOf(grid, feature);
  // Where lines are what is looked for, one that stays may be the sky's.
  const doubtful =
    (request.purpose === "line" && feature.kind === "persistent-line") ||
    liesInProtected(grid.survey, request, feature);
  const { counts, significance } = feature;
  const amplitude = amplitudeOf(feature);
  const samples = usableOf(grid, feature);
  const only = feature.who.kind === "listed" && feature.who.baselines === 1;
  return {
    kind: feature.kind,
    cause: only ? "baseline" : feature.who.kind === "antenna" ? "antenna" : CAUSES[feature.kind],
    scope: scopeOf(grid, feature),
    flag: doubtful ? null : flag!,
    ...(doubtful || others.length === 0 ? {} : { alsoFlag: others }),
    size: amplitude,
    sizeError: Number.NaN,
    unit: "sigma",
    significance,
    confidence: doubtful ? DOUBTFUL_LINE : confidenceOf(significance, counts.elevated / counts.usable),
    samples,
    // A burst that fills the band is in all of its samples, whatever each looks like.
    outlying:
      feature.amplitude === undefined
        ? Math.round((samples / Math.max(1, counts.usable)) * aboveNoise(counts.elevated, counts.usable))
        : samples,
    evidence: evidenceOf(grid, feature, amplitude, doubtful),
    repair: null,
  };
}

/** Samples elevated beyond what noise elevates. */
function aboveNoise(elevated: number, usable: number): number {
  return Math.max(0, (elevated - ELEVATED_SHARE * usable) / (1 - ELEVATED_SHARE));
}

/** Strong and filled is sure; faint or thinly filled is less so. */
function confidenceOf(significance: number, share: number): number {
  const sure = Number.isNaN(significance) ? 0.9 : 1 - Math.exp(-significance / 5);
  const filled = Number.isNaN(share) ? 0.9 : Math.min(1, 0.6 + share);
  return Math.min(0.99, sure * filled);
}

function evidenceOf(grid: Grid, feature: Feature, amplitude: number, doubtful: boolean): string {
  const { who } = feature;
  const { polarizations } = grid.survey.dataset;
  const products =
    who.subset.polarizations === null
      ? ""
      : ` in ${polarizations.filter((_, p) => who.subset.polarizations![p] === 1).join(" and ")}`;
  const shares = shareWords(grid, feature);
  const doubt = doubtful ? "; it may be a line of the sky, which this observation looks for" : "";
  const size = amplitude >= 8 ? "8 sigma a sample or more" : `about ${amplitude.toFixed(1)} sigma a sample`;
  return (
    `${channelWords(grid, feature)} ${verb(feature)} ${durationWords(grid, feature)} on ${baselineWords(grid, feature)}` +
    `${products}, by ${size}${shares}${steadinessWords(grid, feature)}${doubt}`
  );
}

function verb(feature: Feature): string {
  if (feature.kind === "drifting-line") return "are crossed in";
  const [low, high] = channelsOf(feature);
  return low === high ? "stands out for" : "stand out for";
}

function shareWords(grid: Grid, { counts, raised }: Feature): string {
  if (raised !== undefined) {
    return `; the noise of these integrations is raised by ${raised.toFixed(1)} times in power on most baselines at once`;
  }
  if (grid.pass.marks === null) {
    return "; the samples are too many to keep a mark of each, so that only sums over all baselines were looked at";
  }
  const looked = grid.pass.choice.isWhole
    ? `their ${counts.usable} samples`
    : `the ${counts.usable} samples looked at`;
  return (
    `; ${percent(counts.elevated / counts.usable)} of ${looked} exceed what ` +
    `${percent(ELEVATED_SHARE)} of noise does`
  );
}

/** How the power of a line goes over time, where most planes say the same. */
function steadinessWords(grid: Grid, feature: Feature): string {
  if (feature.kind !== "persistent-line" || feature.who.kind !== "all") return "";
  const [low, high] = channelsOf(feature);
  const { planes, steady, unsteady } = grid.pass.kurtosis.countsOf(
    low,
    high,
    feature.who.subset.polarizations,
  );
  if (steady > planes / 2) return "; it is as steady as a carrier (spectral kurtosis below that of noise)";
  if (unsteady > planes / 2) return "; it comes and goes (spectral kurtosis above that of noise)";
  return "";
}

function channelWords(grid: Grid, feature: Feature): string {
  const { dataset } = grid.survey;
  const { channels, subbands } = dataset.shape;
  const [low, high] = channelsOf(feature);
  const { frequencies, channelWidths } = dataset.setups[0]!;
  const edges = [low, high].flatMap((column) => {
    const half = channelWidths[Math.floor(column / channels)]! / 2;
    return [frequencies[column]! - half, frequencies[column]! + half];
  });
  const [from, to] = [Math.min(...edges) / 1e6, Math.max(...edges) / 1e6];
  const digits = Math.max(0, Math.min(6, 2 - Math.floor(Math.log10(Math.max(1e-6, to - from)))));
  const [a, b] = [low % channels, high % channels];
  const [first, last] = [Math.floor(low / channels), Math.floor(high / channels)];
  const name = (subband: number, channel: number) =>
    subbands === 1 ? `${channel}` : `${channel} of sub-band ${subband}`;
  const range =
    low === high
      ? `Channel ${name(first, a)}`
      : first === last
        ? `Channels ${a} to ${name(last, b)}`
        : `Channels ${name(first, a)} to ${name(last, b)}`;
  const setups = dataset.setups.length > 1 ? " in the first setup" : "";
  return `${range} (${from.toFixed(digits)} to ${to.toFixed(digits)} MHz${setups})`;
}

function durationWords(grid: Grid, { rectangles }: Feature): string {
  const { integration } = grid.survey;
  const first = Math.min(...rectangles.map(({ firstStep }) => firstStep));
  const last = Math.max(...rectangles.map(({ lastStep }) => lastStep));
  if (first === 0 && last === grid.steps - 1 && rectangles.length === 1) return "the whole time";
  let seconds = 0;
  for (const r of rectangles) {
    const [start, end] = grid.timeRange(r.firstStep, r.lastStep);
    seconds += (end - start) * SECONDS_PER_DAY + (Number.isFinite(integration) ? integration : 0);
  }
  const length = `${Number(seconds.toPrecision(3))} s`;
  return rectangles.length === 1 ? length : `${length} in ${rectangles.length} pieces`;
}

function baselineWords(grid: Grid, { who }: Feature): string {
  const all = grid.survey.baselines.length;
  if (who.kind === "all") return all === 1 ? "the one baseline" : `all ${all} baselines`;
  if (who.kind === "antenna") return `the ${who.baselines} baselines of one antenna`;
  const share = `${who.baselines} of ${all} baselines (${percent(who.baselines / all)})`;
  return who.kind === "short"
    ? `the shortest ${share}, below ${Number((who.shorterThan * SPEED_OF_LIGHT).toPrecision(3))} m`
    : share;
}

function percent(share: number): string {
  return `${Number((100 * share).toPrecision(2))} %`;
}
