/** Baselines that the screen shows to be unlike the others, or unlike themselves at other times. */
import type { Shape } from "../../dataset/dataset.ts";
import type { Screened } from "../../measure/screen/screen.ts";
import { medianInPlace } from "../statistics/order.ts";

/** Share of differences that noise puts above HIGH. */
const NOISE_SHARE = Math.exp(-4);
/** Errors by which a count of high differences must exceed what is usual. Neighbouring differences share a sample. */
const ERRORS = 6;
const SHARED = 2;
/** A baseline is odd from this many times the share that is usual of all. */
const TIMES = 1.5;
/** Tiles that tell what is usual of a baseline. */
const FEWEST_TILES = 3;

export interface OddBaselines {
  /** by tile: (baselines) 1 where more differences are high than usual; null: none */
  readonly tiles: readonly (Uint8Array | null)[];
  /** (baselines) 1 where more are at all times than on the others */
  readonly always: Uint8Array;
}

export function oddBaselines(shape: Shape, { tiles }: Screened, baselines: number): OddBaselines {
  const products = shape.subbands * shape.polarizations;
  const found: (Uint8Array | null)[] = tiles.map(() => null);
  const always = new Uint8Array(baselines);
  const work = new Float64Array(Math.max(tiles.length, baselines));
  for (let product = 0; product < products; product++) {
    const usual = new Float64Array(baselines);
    const asked = new Float64Array(baselines);
    for (let b = 0; b < baselines; b++) {
      let known = 0;
      for (const tile of tiles) {
        const count = tile?.asked[b * products + product] ?? 0;
        if (count === 0) continue;
        work[known++] = tile!.high[b * products + product]! / count;
        asked[b]! += count;
      }
      usual[b] = medianInPlace(work, known);
    }
    let known = 0;
    for (let b = 0; b < baselines; b++) if (asked[b]! > 0) work[known++] = usual[b]!;
    const typical = Math.max(NOISE_SHARE, medianInPlace(work, known));
    for (let b = 0; b < baselines; b++) {
      if (usual[b]! > TIMES * typical && isMore(usual[b]! * asked[b]!, asked[b]!, typical)) always[b] = 1;
      const share = tiles.length < FEWEST_TILES ? typical : Math.max(NOISE_SHARE, usual[b]!);
      for (const [number, tile] of tiles.entries()) {
        const at = b * products + product;
        if (tile === null || !isMore(tile.high[at]!, tile.asked[at]!, share)) continue;
        found[number] ??= new Uint8Array(baselines);
        found[number]![b] = 1;
      }
    }
  }
  return { tiles: found, always };
}

function isMore(high: number, asked: number, share: number): boolean {
  return high > share * asked + ERRORS * Math.sqrt(SHARED * share * asked);
}

/** Bright differences of one baseline and tile that are no chance, */
const SEVERAL = 3;
/** and the share of all that chance makes bright, with room for rows whose level is told by few channels; and so many more. */
const CHANCE = 3e-6;
const FEW = 10;

export interface BrightBaselines {
  readonly tiles: readonly (Uint8Array | null)[];
  /** of the baselines and tiles that are not `seen` anyhow */
  readonly share: number;
}

/**
 * Baselines with bright differences: several each, or any where there are more in all than chance makes.
 *
 * @param seen (tiles) 1 where it does not matter
 */
export function brightBaselines(
  shape: Shape,
  { tiles }: Screened,
  baselines: number,
  seen: Uint8Array,
): BrightBaselines {
  const products = shape.subbands * shape.polarizations;
  let bright = 0;
  let asked = 0;
  for (const tile of tiles) {
    for (const count of tile?.bright ?? []) bright += count;
    for (const count of tile?.asked ?? []) asked += count;
  }
  const least = bright > CHANCE * asked + FEW ? 1 : SEVERAL;
  let some = 0;
  let all = 0;
  const found = tiles.map((tile, number) => {
    if (tile === null || seen[number] === 1) return null;
    const here = new Uint8Array(baselines);
    for (let b = 0; b < baselines; b++) {
      let count = 0;
      for (let p = 0; p < products; p++) count += tile.bright[b * products + p]!;
      if (count >= least) here[b] = 1;
    }
    const count = here.reduce((sum, one) => sum + one, 0);
    some += count;
    all += baselines;
    return count === 0 ? null : here;
  });
  return { tiles: found, share: all === 0 ? 0 : some / all };
}
