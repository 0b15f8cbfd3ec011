/**
 * Which baselines of which tiles the second pass looks at, by the survey's screen. What is not looked at holds nothing
 * that stands out: neither sums over baselines, nor the noise of integrations, nor a baseline by itself.
 */
import type { Screened } from "../../measure/screen/screen.ts";
import { type TileShape, tileShape } from "../../measure/screen/shape.ts";
import type { Survey } from "../../measure/survey-result.ts";
import { bandsOf } from "./bands.ts";
import { brightBaselines, oddBaselines } from "./odd-baselines.ts";
import { suspectsOf } from "./suspects.ts";

/** How a baseline of a tile is looked at: not at all; for its own marks; as one of a sample; with all others. */
export const UNSEEN = 0;
export const ALONE = 1;
export const SAMPLED = 2;
export const SEEN = 3;

export interface Choice {
  readonly cut: TileShape;
  /** by tile: (baselines) how each is looked at; null: the tile is not read for marks */
  readonly looks: readonly (Uint8Array | null)[];
  /** everything is SEEN */
  readonly isWhole: boolean;
  /**
   * (channels of all sub-bands) 1 where something is there all the time, so that averages have to do without it
   * everywhere alike; null: nothing, or everything is SEEN
   */
  readonly leftOut: Uint8Array | null;
}

/** Integrations of a baseline in which something that is always there is looked at. */
const SAMPLE_INTEGRATIONS = 64;
/** Share of the baselines that most tiles must have, or rows are in no order of time, and slots no integrations. */
const LEAST_BASELINES = 0.5;
/** Of baselines and tiles, those with a bright sample are looked at; a sample of them if they are more than this share. */
const MOST_BRIGHT = 0.2;

export function choose(survey: Survey): Choice {
  const { dataset, screen, baselines } = survey;
  const cut = screen?.cut ?? tileShape(dataset);
  const all = wholeChoice(survey);
  if (screen === undefined || !screen.isOn || bandsOf(dataset.shape).length === 0) return all;
  if (!isByTime(screen, baselines.length)) return all;
  const { tiles: seen, persistent } = suspectsOf(survey, screen);
  const odd = oddBaselines(dataset.shape, screen, baselines.length);
  const bright = brightBaselines(dataset.shape, screen, baselines.length, seen);
  const isPersistent = persistent.includes(1);
  const any =
    isPersistent ||
    seen.includes(1) ||
    bright.tiles.some(Boolean) ||
    odd.tiles.some(Boolean) ||
    odd.always.includes(1);
  // One tile is too little to tell what is usual of it.
  if (cut.tiles === 1 && any) return all;
  const isSample = isPersistent || bright.share > MOST_BRIGHT;
  const perTile = cut.tileRows / Math.max(1, baselines.length);
  const every = Math.max(1, Math.floor((cut.tiles * perTile) / SAMPLE_INTEGRATIONS));
  const looks = Array.from({ length: cut.tiles }, (_, tile): Uint8Array | null => {
    if (screen.tiles[tile] === null) return null;
    if (seen[tile] === 1) return new Uint8Array(baselines.length).fill(SEEN);
    const look = new Uint8Array(baselines.length);
    raise(look, odd.tiles[tile], ALONE);
    if (isSample) {
      for (let b = (every - (tile % every)) % every; b < look.length; b += every) look[b] = SAMPLED;
    } else raise(look, bright.tiles[tile], ALONE);
    if (!isPersistent) raise(look, odd.always, ALONE);
    return look.some((how) => how !== UNSEEN) ? look : null;
  });
  const isWhole = looks.every((look) => look?.every((how) => how === SEEN) ?? false);
  return { cut, looks, isWhole, leftOut: isPersistent && !isWhole ? persistent : null };
}

/** Whether most tiles have rows of most baselines. */
function isByTime({ tiles }: Screened, baselines: number): boolean {
  let most = 0;
  let all = 0;
  for (const tile of tiles) {
    if (tile === null) continue;
    const products = tile.asked.length / baselines;
    let met = 0;
    for (let b = 0; b < baselines; b++) {
      if (tile.asked.subarray(b * products, (b + 1) * products).some((count) => count > 0)) met += 1;
    }
    all += 1;
    if (met >= LEAST_BASELINES * baselines) most += 1;
  }
  return most > all / 2;
}

/** Everything with everything else. */
export function wholeChoice({ dataset, screen, baselines }: Survey): Choice {
  const cut = screen?.cut ?? tileShape(dataset);
  const looks = Array.from({ length: cut.tiles }, () => new Uint8Array(baselines.length).fill(SEEN));
  return { cut, looks, isWhole: true, leftOut: null };
}

function raise(look: Uint8Array, which: Uint8Array | null | undefined, how: number): void {
  if (which === null || which === undefined) return;
  for (let b = 0; b < look.length; b++) if (which[b] === 1 && look[b]! < how) look[b] = how;
}
