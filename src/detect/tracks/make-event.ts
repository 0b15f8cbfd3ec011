/** What every event of an antenna or a baseline needs: its samples counted, its times in words. */
import type { Polarization } from "../../dataset/dataset.ts";
import { EVERYTHING, type Selection } from "../../dataset/selection.ts";
import type { Survey } from "../../measure/survey-result.ts";
import { isoFromMjd } from "../../util/dates.ts";
import type { DetectedEvent } from "../event.ts";
import type { Grid } from "./grid.ts";

/** Fields that the maker fills itself. */
type Counted = "samples" | "outlying" | "confidence" | "flag" | "scope" | "repair";

export type Draft = Omit<DetectedEvent, Counted> & {
  readonly scope: Partial<Selection>;
  /** absent: the scope */
  readonly flag?: Partial<Selection> | null;
  readonly repair?: string | null;
  /** absent: from the significance */
  readonly confidence?: number;
};

export function makeEvent(grid: Grid, draft: Draft): DetectedEvent {
  const scope: Selection = { ...EVERYTHING, ...draft.scope };
  const flag =
    draft.flag === undefined ? scope : draft.flag === null ? null : { ...EVERYTHING, ...draft.flag };
  const samples = samplesOf(grid.survey, scope);
  return {
    ...draft,
    scope,
    flag,
    repair: draft.repair ?? null,
    confidence: draft.confidence ?? confidenceOf(draft.significance),
    samples,
    outlying: samples,
  };
}

/** 0.5 at 5 sigmas, 0.99 from 12 on. */
export function confidenceOf(significance: number): number {
  return Math.min(0.99, Math.max(0.3, 0.5 + (0.49 * (significance - 5)) / 7));
}

/** Samples of a selection without channels that are not flagged or bad. */
export function samplesOf({ tracks, dataset, baselines }: Survey, scope: Selection): number {
  const { subbands, polarizations } = dataset.shape;
  let samples = 0;
  for (const [b, { antenna1, antenna2 }] of baselines.entries()) {
    if (scope.antennas !== null && !scope.antennas.includes(antenna1) && !scope.antennas.includes(antenna2))
      continue;
    if (
      scope.baselines !== null &&
      !scope.baselines.some(
        ([x, y]) => (x === antenna1 && y === antenna2) || (y === antenna1 && x === antenna2),
      )
    )
      continue;
    for (let cell = tracks.firstCell[b]!; cell < tracks.firstCell[b + 1]!; cell++) {
      const time = tracks.time[cell]!;
      if (scope.time !== null && !(time >= scope.time[0] && time <= scope.time[1])) continue;
      if (scope.fields !== null && !scope.fields.includes(tracks.field[cell]!)) continue;
      for (let s = 0; s < subbands; s++) {
        if (scope.subbands !== null && !scope.subbands.includes(s)) continue;
        for (let p = 0; p < polarizations; p++) {
          if (scope.polarizations !== null && !scope.polarizations.includes(dataset.polarizations[p]!))
            continue;
          const i = (cell * subbands + s) * polarizations + p;
          samples += tracks.usable[i]! + tracks.zero[i]!;
        }
      }
    }
  }
  return samples;
}

/** MJD of integrations [start, end), a hair wider than the centres are exact; null for all of them. */
export function spanOf(grid: Grid, start: number, end: number): readonly [number, number] | null {
  if (start <= 0 && end >= grid.times.length) return null;
  return [grid.times[start]!, grid.times[end - 1]!];
}

/** hh:mm:ss of the day, UTC. */
export function clock(mjd: number): string {
  return isoFromMjd(mjd, { seconds: 0 }).slice(11, 19);
}

export function degrees(radians: number): number {
  return (radians * 180) / Math.PI;
}

/** The sub-bands and polarizations that some planes are; null for all there are. */
export function productsOf(
  grid: Grid,
  which: readonly number[],
): { subbands: number[] | null; polarizations: Polarization[] | null } {
  const { planes } = grid;
  const unique = <T>(values: readonly T[]) => [...new Set(values)];
  const subbands = unique(which.map((i) => planes[i]!.subband));
  const polarizations = unique(which.map((i) => planes[i]!.polarization));
  return {
    subbands: subbands.length === unique(planes.map(({ subband }) => subband)).length ? null : subbands,
    polarizations:
      polarizations.length === unique(planes.map(({ polarization }) => polarization)).length
        ? null
        : polarizations,
  };
}
