/** A suggested flag, as flags.json holds it: a proposal for a person to accept. */
import type { Selection } from "../dataset/selection.ts";

export interface FlagCost {
  /** 1 - sqrt(sum of kept weights / sum of all), natural weighting */
  readonly sensitivityLossFraction: number;
  /** relative change of the beam axes, planned weighting; NaN not computed */
  readonly beamMajorChangeFraction: number;
  readonly beamMinorChangeFraction: number;
  readonly peakSidelobeChangeFraction: number;
  readonly largestGapChangeFraction: number;
}

export interface FlagEntry extends Selection {
  /** "F1", "F2", ... by confidence times samples, largest first */
  readonly id: string;
  readonly rule: string;
  readonly reason: string;
  /** this entry's own samples that were not flagged before */
  readonly samples: number;
  /** of the dataset's not-yet-flagged samples */
  readonly fraction: number;
  /** 0..1 */
  readonly confidence: number;
  readonly cost: FlagCost;
}

export interface FlagFile {
  readonly format: "visvet-flags";
  readonly version: 1;
  readonly dataset: string;
  readonly entries: readonly FlagEntry[];
}
