/**
 * How the rows of a dataset are cut for the screen and for the second pass, from its sizes alone: tiles, runs of rows
 * that are looked at together, and slots, about one integration each, of which a tile has a whole number.
 */
import type { Dataset } from "../../dataset/dataset.ts";
import { settleSurvey } from "../settings.ts";

/** Samples of a tile, and the integrations that it should hold if this many more samples allow. */
const TILE_SAMPLES = 1 << 20;
const MOST_TILE_SAMPLES = 1 << 24;
const WANTED_INTEGRATIONS = 32;
/** Sums over baselines that are kept of all slots together, about. */
const MOST_SUMS = 1 << 22;
/** Channels from which on each sub-band has a level of its own. */
export const CHANNELS_OF_A_LEVEL = 16;
/** Second differences in a row that its level needs. */
const FEWEST_DIFFERENCES = 8;

export interface TileShape {
  readonly tileRows: number;
  readonly tiles: number;
  readonly slotRows: number;
  /** the last tile may have fewer */
  readonly slotsPerTile: number;
}

export function tileShape(dataset: Dataset): TileShape {
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  const rows = Math.max(1, dataset.rows);
  const { baselines } = settleSurvey(dataset);
  const wanted = Math.max(TILE_SAMPLES / rowSamples, WANTED_INTEGRATIONS * baselines);
  const most = Math.max(1, Math.min(rows, Math.floor(Math.min(MOST_TILE_SAMPLES / rowSamples, wanted))));
  const slotRows = Math.min(most, Math.max(baselines, Math.ceil((rows * rowSamples) / MOST_SUMS)));
  const slotsPerTile = Math.floor(most / slotRows);
  const tileRows = slotRows * slotsPerTile;
  return { tileRows, tiles: Math.ceil(rows / tileRows), slotRows, slotsPerTile };
}

/** Whether a row has channels enough to be screened. */
export function canScreen({ shape: { subbands, channels } }: Dataset): boolean {
  return channels >= 3 && subbands * (channels - 2) >= FEWEST_DIFFERENCES;
}
