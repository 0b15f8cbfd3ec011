/** What detection needs to know of the plan. */
import type { LineRange, PlanRequest } from "../dataset/plan-request.ts";

export interface DetectRequest {
  readonly purpose: NonNullable<PlanRequest["purpose"]>;
  /** never flagged for being bright */
  readonly lineChannels: readonly LineRange[];
  readonly onProgress?: (rowsDone: number, rows: number) => void;
}
