/** What detection needs to know of the plan. */

import type { LineRange, PlanRequest } from "../dataset/plan-request.ts";
import type { Workers } from "../util/workers.ts";

export interface DetectRequest {
  readonly purpose: NonNullable<PlanRequest["purpose"]>;
  /** never flagged for being bright */
  readonly lineChannels: readonly LineRange[];
  readonly onProgress?: (rowsDone: number, rows: number) => void;
  /** threads that share the pass over the samples; none: this one does it. The result is the same. */
  readonly workers?: Workers | undefined;
}
