/**
 * What caps the dynamic range, worst first. An error of phase (radians) or amplitude (fraction) e on some of the
 * samples of a point source leaves in the image an rms, off the source, of e sqrt(sum E^2 / 2) / sum T, where T are the
 * imaging weights and E those that carry the error, samples closer than 1/field added first. For one snapshot of N
 * antennas this is the published N(N-1)/(sqrt 2 e) of one baseline and N sqrt(N-1)/(sqrt 2 e) of one antenna; it counts
 * how far Earth rotation and bandwidth spread the error.
 * @see Perley 1999, Synthesis Imaging in Radio Astronomy II, ASP Conf. Ser. 180, chapter 13
 */
import type { Selection } from "../dataset/selection.ts";
import type { DetectedEvent, EventKind } from "../detect/event.ts";
import { formatNumber, formatPercent } from "../util/units.ts";
import { cellFactors, imagingWeight, truncated } from "./cell-weights.ts";
import { eachSelection, type GriddedImage } from "./cost.ts";
import { errorRms } from "./error-rms.ts";
import type { Limit } from "./image.ts";
import { fieldCells } from "./moment-grid.ts";

/** A limit and the event behind it; null for one of the whole dataset. */
export interface RankedLimit extends Limit {
  readonly event: DetectedEvent | null;
  /** of that event in the list given */
  readonly eventIndex: number | null;
}

/** More events than these are not ranked one by one: the most significant are. */
const MOST_EVENTS = 48;

/** One snapshot, peak over rms, error e; for tests and for words. `of`: what carries the error. */
export function snapshotDynamicRange(
  of: "baseline" | "antenna" | "baselines" | "antennas",
  n: number,
  e: number,
): number {
  switch (of) {
    case "baseline":
      return (n * (n - 1)) / (Math.SQRT2 * e);
    case "antenna":
      return (n * Math.sqrt(n - 1)) / (Math.SQRT2 * e);
    case "baselines":
      return Math.sqrt(n * (n - 1)) / e;
    case "antennas":
      return Math.sqrt(n * (n - 1)) / (Math.SQRT2 * e);
  }
}

/** What the amplitudes are measured against, dataset unit. */
export interface SourceLevel {
  /** amplitude of the source; 0 or NaN unknown */
  readonly brightness: number;
  /** typical noise of one sample */
  readonly sampleNoise: number;
  /** Hz, over which a delay turns the phase */
  readonly bandwidth: number;
}

/** An error on some samples. */
export interface SpoiledSamples {
  readonly scope: Selection;
  readonly error: EventError;
  /** how many samples the error is independent on; of no account where it is the same on all */
  readonly samples: number;
}

/** Peak over rms that each error alone allows, at the planned weighting; Infinity where it touches no sample. */
export async function capsOf(image: GriddedImage, spoiled: readonly SpoiledSamples[]): Promise<number[]> {
  if (spoiled.length === 0) return [];
  const cells = truncated(image.cells, 0);
  const factors = cellFactors(cells, image.plan.weighting.value);
  const total = imagingWeight(cells, factors);
  const place = fieldCells(cells);
  const factorOf = (iu: number, iv: number) => factors[place(iu, iv)] ?? 0;
  const caps: number[] = [];
  await eachSelection(
    image,
    spoiled.map(({ scope }) => scope),
    (index, taken) => {
      const { error, samples } = spoiled[index]!;
      const { rms, weight } = errorRms(taken, factorOf);
      // Errors of their own on each sample add in squares.
      const sum = error.coherent ? rms : weight / Math.sqrt(2 * Math.max(1, samples));
      caps[index] = total / (error.size * sum);
    },
  );
  return caps;
}

/** Limits by events, each as if it were alone; events that leave a point source as it is have none. */
export async function eventLimits(
  image: GriddedImage,
  events: readonly DetectedEvent[],
  level: SourceLevel,
): Promise<RankedLimit[]> {
  const ranked = events
    .map((event, eventIndex) => ({ event, eventIndex, error: errorOf(event, level) }))
    .filter(({ error }) => error.size > 0)
    .sort((a, b) => b.event.significance - a.event.significance || a.eventIndex - b.eventIndex)
    .slice(0, MOST_EVENTS);
  const caps = await capsOf(
    image,
    ranked.map(({ event, error }) => ({ scope: event.scope, error, samples: event.samples })),
  );
  return ranked.flatMap(({ event, eventIndex, error }, i) =>
    Number.isFinite(caps[i]!) ? [{ ...limitOf(event, error, caps[i]!), eventIndex }] : [],
  );
}

/** How an event spoils its samples. */
export interface EventError {
  /** phase in radians or amplitude as a fraction of the source's; 0: it does not spoil the image */
  readonly size: number;
  /** the same on all of them, or its own on each */
  readonly coherent: boolean;
  readonly what: string;
}

const NO_ERROR: EventError = { size: 0, coherent: true, what: "" };

function errorOf(event: DetectedEvent, level: SourceLevel): EventError {
  const size = Math.abs(event.size);
  switch (event.kind) {
    case "closure":
      return event.unit === "ratio" ? amplitudeError(event.size) : phaseError(size);
    case "phase-jump":
      return phaseError(size);
    case "half-turn":
      return phaseError(180);
    case "phase-noise":
      return {
        size: Math.min((size * Math.PI) / 180, Math.SQRT2),
        coherent: false,
        what: `phase noise of ${formatNumber(size)} degrees rms`,
      };
    case "delay-slope": {
      const rms = Math.min((2 * Math.PI * size * 1e-9 * level.bandwidth) / Math.sqrt(12), Math.SQRT2);
      return { size: rms, coherent: true, what: `a delay error of ${formatNumber(size)} ns` };
    }
    case "gain-step":
    case "weak-antenna":
    case "hand-off":
      return amplitudeError(event.size);
    case "silent-antenna": {
      // What is left of the source, where it says so.
      const lost = event.unit === "ratio" ? Math.abs(1 - Math.min(size, 1)) : 1;
      return { size: lost, coherent: true, what: `${formatPercent(lost)} of the source missing` };
    }
    case "stuck-zeros":
      return { size: 1, coherent: true, what: "samples without the source" };
    case "dropout": {
      const share = event.unit === "fraction" ? Math.min(size, 1) : 1;
      return {
        size: share,
        coherent: true,
        what: `the source missing for ${formatPercent(share)} of the time`,
      };
    }
    case "persistent-line":
    case "burst":
    case "drifting-line":
    case "lone-samples": {
      const excess = (size * level.sampleNoise) / level.brightness;
      const share = event.samples > 0 ? Math.sqrt(event.outlying / event.samples) : 1;
      return Number.isFinite(excess)
        ? { size: excess * share, coherent: false, what: `interference of ${formatNumber(size)} sigma` }
        : NO_ERROR;
    }
    default:
      // Noise, weights and polarization of the cross hands leave a point source where it is.
      return NO_ERROR;
  }
}

/** The same phase on all samples, of any size: |exp(i phase) - 1|. */
function phaseError(degrees: number): EventError {
  return {
    size: 2 * Math.abs(Math.sin((degrees * Math.PI) / 360)),
    coherent: true,
    what: `a phase error of ${formatNumber(degrees)} degrees`,
  };
}

/** A gain of `ratio` times the others'. */
function amplitudeError(ratio: number): EventError {
  const size = Math.abs(ratio - 1);
  return { size, coherent: true, what: `an amplitude error of ${formatPercent(size)}` };
}

const CAUSES: Partial<Record<EventKind, string>> = {
  "half-turn": "half-turn flip",
  closure: "correlator error",
};

function limitOf(event: DetectedEvent, error: EventError, range: number): Omit<RankedLimit, "eventIndex"> {
  const cause = CAUSES[event.kind] ?? event.kind.replaceAll("-", " ");
  return {
    event,
    cause: event.kind,
    dynamicRangeFraction: range,
    text: `${cause} on ${scopeText(event)}: ${error.what} allows a dynamic range of ${formatNumber(range)}`,
  };
}

/** "antenna 7", "baseline 3-9", "2 antennas" ... numbers only, so that nothing hostile gets into it. */
function scopeText(event: DetectedEvent): string {
  const { antennas, baselines, channels } = event.scope;
  if (antennas !== null && antennas.length > 0) return named("antenna", antennas.map(String));
  if (baselines !== null && baselines.length > 0) {
    return named(
      "baseline",
      baselines.map(([a, b]) => `${a}-${b}`),
    );
  }
  if (channels !== null && channels.length > 0) {
    return named(
      "channel",
      channels.map(([low, high]) => (low === high ? `${low}` : `${low}-${high}`)),
    );
  }
  return "all antennas";
}

function named(word: string, names: readonly string[]): string {
  if (names.length > 4) return `${names.length} ${word}s`;
  return `${word}${names.length === 1 ? "" : "s"} ${names.join(", ")}`;
}
