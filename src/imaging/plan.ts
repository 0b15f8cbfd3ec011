/** The plan with every value filled in, and where each came from. Derivation is in `derive-plan.ts`. */
import type { LineRange, Weighting } from "../dataset/plan-request.ts";

export interface PlanValue<T> {
  readonly value: T;
  /** given by the user, read from the file, derived from other values, or a stated default */
  readonly origin: "given" | "file" | "derived" | "default";
  /** one clause: "1.13 lambda/D of the 25 m antennas at 1.42 GHz" */
  readonly how: string;
}

export interface Plan {
  /** full width, radians */
  readonly fieldOfView: PlanValue<number>;
  /** radians */
  readonly resolution: PlanValue<number>;
  /** radians */
  readonly largestScale: PlanValue<number>;
  /** Jy a beam; null: none planned */
  readonly targetRms: PlanValue<number | null>;
  /** peak over rms */
  readonly dynamicRange: PlanValue<number>;
  /** metres; null unknown */
  readonly dishDiameter: PlanValue<number | null>;
  readonly weighting: PlanValue<Weighting>;
  readonly correctsW: PlanValue<boolean>;
  readonly purpose: PlanValue<"continuum" | "line" | "calibrator">;
  readonly lineChannels: PlanValue<readonly LineRange[]>;
  readonly expectedSefd: PlanValue<number | null>;
}
