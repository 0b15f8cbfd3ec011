/** What every row needs of gains and air, worked out once for a dataset and never changed. */
import { atmosphericDelays } from "./atmosphere.ts";
import { type GainTable, gainTable, type LeakageTable, leakageTable } from "./gains.ts";
import type { Observation } from "./observation.ts";

/** null: none, every gain 1 and every delay 0 */
export interface Instrument {
  readonly gains: GainTable | null;
  readonly leakage: LeakageTable | null;
  /** (integrations x antennas) turns a Hz */
  readonly air: Float64Array | null;
}

export function instrumentOf(observation: Observation): Instrument {
  return {
    gains: gainTable(observation),
    leakage: leakageTable(observation),
    air: atmosphericDelays(observation),
  };
}
