/** What the user wrote in plan.yaml: every key optional, units resolved. The parser is in `plan-file.ts`. */

export type Weighting =
  | { readonly kind: "natural" | "uniform" }
  | { readonly kind: "robust"; readonly robust: number };

/** Sub-band and inclusive channel range, from 0. */
export interface LineRange {
  readonly subband: number;
  readonly channels: readonly [number, number];
}

export interface PlanRequest {
  /** full width, radians */
  readonly fieldOfView?: number;
  /** radians */
  readonly resolution?: number;
  /** radians */
  readonly largestScale?: number;
  /** Jy a beam */
  readonly targetRms?: number;
  /** peak over rms */
  readonly dynamicRange?: number;
  /** metres */
  readonly dishDiameter?: number;
  readonly weighting?: Weighting;
  readonly correctsW?: boolean;
  readonly purpose?: "continuum" | "line" | "calibrator";
  readonly lineChannels?: readonly LineRange[];
  /** Jy */
  readonly expectedSefd?: number;
}
