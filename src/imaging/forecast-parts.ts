/** Everything that the report and the measures of a forecast are made from. */
import type { Weighting } from "../dataset/plan-request.ts";
import type { MadeBeam } from "./beams.ts";
import type { CalibratorResult } from "./calibrator.ts";
import type { CoverageResult } from "./coverage.ts";
import type { Coverage, WTerm } from "./image.ts";
import type { RankedLimit } from "./limits.ts";
import type { Plan } from "./plan.ts";
import type { Sampling } from "./sampling.ts";
import type { SmearingResult } from "./smearing.ts";
import type { TrackW } from "./track-w.ts";
import type { BaselineW } from "./w-report.ts";

export interface ForecastParts {
  readonly sampling: Sampling;
  readonly plan: Plan;
  readonly calibrated: boolean;
  readonly weightings: readonly NamedBeam[];
  readonly planned: MadeBeam;
  readonly natural: MadeBeam;
  readonly coverage: CoverageResult;
  /** as it was before samples were flagged */
  readonly unflagged: Coverage;
  readonly trackW: TrackW;
  readonly wTerm: WTerm;
  /** radians */
  readonly wShift: number;
  readonly baselines: readonly BaselineW[];
  readonly smearing: SmearingResult;
  readonly limits: readonly RankedLimit[];
  /** null where the plan is for something else, or no source stands above the noise */
  readonly calibrator: CalibratorResult | null;
  /** Jy that the measured noise means for one antenna; NaN unknown */
  readonly sefd: number;
}

export interface NamedBeam {
  readonly weighting: Weighting;
  readonly name: string;
  readonly planned: boolean;
  readonly made: MadeBeam;
}
