/** What a fault does to a row, stage by stage, and which samples it spoils. */
import type { Selection } from "../../dataset/selection.ts";
import type { DetectedEvent } from "../../detect/event.ts";

/** One row on its way from sky to samples. Arrays are (channels x products), product fastest. */
export interface RowState {
  /** integration and baseline */
  time: number;
  baseline: number;
  /** index into stations */
  station1: number;
  station2: number;
  /** hands exchanged before the products are formed, at either antenna */
  exchanged1: boolean;
  exchanged2: boolean;
  /** Jy, before noise */
  readonly signalRe: Float64Array;
  readonly signalIm: Float64Array;
  /** rms of the real part by the radiometer equation and the antennas' gains, and as it really is */
  readonly sigma: Float64Array;
  readonly noise: Float64Array;
  readonly valueRe: Float64Array;
  readonly valueIm: Float64Array;
  readonly weight: Float64Array;
  /** seconds of light travel, as written, and true */
  u: number;
  v: number;
  w: number;
  readonly actual: { u: number; v: number; w: number; untracked: number };
  /** antenna numbers as written */
  antenna1: number;
  antenna2: number;
}

export type Stage = "hands" | "signal" | "noise" | "value" | "weight" | "header";

export interface Effect {
  readonly stages: Partial<Record<Stage, (row: RowState) => void>>;
  covers(time: number, baseline: number): boolean;
  /** Set 1 at `out[at + sample]` for each sample of the row that the fault touches. Called for covered rows alone. */
  mark(time: number, baseline: number, out: Uint8Array, at: number): void;
}

/** What a fault really spoils. */
export type Spoils = "values" | "weights" | "flags" | "geometry" | "rows";

/** A fault worked out: the truth about it, and its effect on rows (none for faults of tables and row order alone). */
export interface CompiledFault {
  readonly kind: string;
  readonly cause: DetectedEvent["cause"] | "tables";
  readonly selection: Selection;
  readonly size: number;
  readonly unit: string;
  readonly spoils: Spoils;
  readonly effect: Effect | null;
}
