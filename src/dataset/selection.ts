/**
 * A selection of samples, as findings and suggested flags name them: the AND of its parts.
 */
import type { Polarization } from "./dataset.ts";

/** null in a part: all of it. An empty list selects nothing. */
export interface Selection {
  /** every baseline to any of these antennas */
  readonly antennas: readonly number[] | null;
  /** either way round */
  readonly baselines: readonly (readonly [number, number])[] | null;
  /** MJD (UTC, days) of integration centres, both ends included */
  readonly time: readonly [number, number] | null;
  /** from 0 */
  readonly subbands: readonly number[] | null;
  /** ranges from 0, both ends included, within each selected sub-band */
  readonly channels: readonly (readonly [number, number])[] | null;
  readonly polarizations: readonly Polarization[] | null;
  /** Field.id */
  readonly fields: readonly number[] | null;
}

export const EVERYTHING: Selection = {
  antennas: null,
  baselines: null,
  time: null,
  subbands: null,
  channels: null,
  polarizations: null,
  fields: null,
};

/** Without what a flag carries besides: a recipe is sent to other threads. */
export function selectionAlone(selection: Selection): Selection {
  const { antennas, baselines, time, subbands, channels, polarizations, fields } = selection;
  return { antennas, baselines, time, subbands, channels, polarizations, fields };
}
