/** All symptoms of an image, measured on what its sources leave. */
import type { Understanding } from "../sky/understand.ts";
import type { UvCells } from "../uv/cells.ts";
import { measureBlur } from "./blur.ts";
import { measureBowl } from "./bowl.ts";
import { measureGhosts } from "./ghosts.ts";
import { measureNoise } from "./noise.ts";
import { measureRings } from "./rings.ts";
import { measureStripes } from "./stripes.ts";
import type { Symptom } from "./symptom.ts";

/** In the order of `SYMPTOM_WORDS`. */
export function measureSymptoms(seen: Understanding, cells: UvCells): Symptom[] {
  return [
    measureStripes(seen, cells),
    measureRings(seen),
    ...measureBlur(seen),
    measureBowl(seen),
    measureGhosts(seen),
    measureNoise(seen),
  ];
}
