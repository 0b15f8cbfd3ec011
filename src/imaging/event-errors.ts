/** What a detected event does to the visibilities of a point source. */
import type { DetectedEvent } from "../detect/event.ts";
import { formatNumber, formatPercent } from "../util/units.ts";
import type { SourceLevel } from "./limits.ts";

/** How an event spoils its samples: what it adds to the visibility 1 of a point source. */
export interface EventError {
  /** of one sign whichever way round the baseline is taken; all of these 0: it does not spoil the image */
  readonly real: number;
  /** as the lower-numbered end of a baseline sees it, or the antenna at fault as its first */
  readonly imaginary: number;
  /** not 0: instead of those, a phase of 2 pi delay x (frequency - middle of the sub-band), seconds */
  readonly delay: number;
  /** rms of what besides is its own on each sample */
  readonly own: number;
  readonly what: string;
}

export function spoils({ real, imaginary, delay, own }: EventError): boolean {
  return real !== 0 || imaginary !== 0 || delay !== 0 || own !== 0;
}

const NO_ERROR: EventError = { real: 0, imaginary: 0, delay: 0, own: 0, what: "" };

export function errorOf(event: DetectedEvent, level: SourceLevel): EventError {
  const size = Math.abs(event.size);
  switch (event.kind) {
    case "closure":
      return event.unit === "ratio" ? amplitudeError(event.size) : phaseError(size);
    case "phase-jump":
      return phaseError(size);
    case "half-turn":
      return phaseError(180);
    case "phase-noise": {
      // Gaussian phases take exp(-sigma^2/2) from the mean of all; the rest of the power is scattered.
      const mean = Math.exp(-(((size * Math.PI) / 180) ** 2) / 2);
      const what = `phase noise of ${formatNumber(size)} degrees rms`;
      return { ...NO_ERROR, real: mean - 1, own: Math.sqrt(1 - mean * mean), what };
    }
    case "delay-slope":
      return { ...NO_ERROR, delay: size * 1e-9, what: `a delay error of ${formatNumber(size)} ns` };
    case "gain-step":
    case "weak-antenna":
    case "hand-off":
      return amplitudeError(event.size);
    case "silent-antenna": {
      // What is left of the source, where it says so.
      const lost = event.unit === "ratio" ? Math.abs(1 - Math.min(size, 1)) : 1;
      return missing(lost, `${formatPercent(lost)} of the source missing`);
    }
    case "stuck-zeros":
      return missing(1, "samples without the source");
    case "dropout": {
      const share = event.unit === "fraction" ? Math.min(size, 1) : 1;
      return missing(share, `the source missing for ${formatPercent(share)} of the time`);
    }
    case "persistent-line":
    case "burst":
    case "drifting-line":
    case "lone-samples": {
      const excess = (size * level.sampleNoise) / level.brightness;
      const share = event.samples > 0 ? Math.sqrt(event.outlying / event.samples) : 1;
      return Number.isFinite(excess)
        ? { ...NO_ERROR, own: excess * share, what: `interference of ${formatNumber(size)} sigma` }
        : NO_ERROR;
    }
    default:
      // Noise, weights and polarization of the cross hands leave a point source where it is.
      return NO_ERROR;
  }
}

/** A gain that a baseline's first antenna has and should not. */
export function gainError(ratio: number, phase: number, what = ""): EventError {
  return { ...NO_ERROR, real: ratio * Math.cos(phase) - 1, imaginary: ratio * Math.sin(phase), what };
}

function phaseError(degrees: number): EventError {
  return gainError(1, (degrees * Math.PI) / 180, `a phase error of ${formatNumber(degrees)} degrees`);
}

/** A gain of `ratio` times the others'. */
function amplitudeError(ratio: number): EventError {
  return gainError(ratio, 0, `an amplitude error of ${formatPercent(Math.abs(ratio - 1))}`);
}

function missing(share: number, what: string): EventError {
  return { ...NO_ERROR, real: -share, what };
}
