/** Which field of a dataset an image is of. */
import type { Field } from "../dataset/dataset.ts";
import type { SkyAxes } from "./image/projection.ts";

/** Id of the field whose phase centre is nearest to the image's reference point; equinoxes a few years apart do not matter. */
export function nearestField(
  fields: readonly Field[],
  sky: Pick<SkyAxes, "rightAscension" | "declination">,
): number {
  let best = fields[0]!;
  let most = -2;
  for (const field of fields) {
    const cosine =
      Math.sin(field.declination) * Math.sin(sky.declination) +
      Math.cos(field.declination) *
        Math.cos(sky.declination) *
        Math.cos(field.rightAscension - sky.rightAscension);
    if (cosine > most) {
      most = cosine;
      best = field;
    }
  }
  return best.id;
}
