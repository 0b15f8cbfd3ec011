/** From an image and the survey of its data to what is behind it. One pass over the samples. */
import { samplingOf } from "../imaging/sampling.ts";
import type { Survey } from "../measure/survey-result.ts";
import { InputError } from "../util/errors.ts";
import { formatAngle } from "../util/units.ts";
import { touchesOf } from "./causes/candidate.ts";
import { type Ranking, rankCauses } from "./causes/rank.ts";
import type { SkyImage } from "./image/sky-image.ts";
import { gatherAtoms } from "./samples/atoms.ts";
import { type Understanding, understand } from "./sky/understand.ts";
import { imageFrame } from "./uv/frame.ts";

export interface Investigation {
  readonly seen: Understanding;
  readonly ranking: Ranking;
}

/** An image this far from the phase centre, radians, is of something else. */
const FARTHEST = (5 * Math.PI) / 180;

/** @throws InputError where the image is not of the field of the data */
export async function investigate(
  survey: Survey,
  image: SkyImage,
  onProgress?: (share: number) => void,
): Promise<Investigation> {
  const sampling = samplingOf(survey);
  const frame = imageFrame(image, sampling.field);
  const reach = (frame.cell * Math.hypot(image.width, image.height)) / 2;
  if (frame.offset > FARTHEST + reach) {
    throw new InputError(
      `the centre of the image lies ${formatAngle(frame.offset)} from the phase centre of field ${sampling.field.id}`,
      { file: image.file },
      "Name the image that was made from this dataset, or its field with --field",
    );
  }
  const atoms = await gatherAtoms({
    sampling,
    frame,
    frequencies: image.plane,
    ...(onProgress === undefined ? {} : { onProgress: (share) => onProgress(share / 2) }),
  });
  let seen = understand(image, sampling, frame, atoms);
  let ranking = rankCauses(seen);
  onProgress?.(0.75);
  const [fault] = ranking.sampleFaults;
  if (fault !== undefined && fault.share < PLAIN_SHARE) {
    // A strong fault spoils the sources, too: once more with those that the other samples give.
    const touches = touchesOf(seen, fault.candidate);
    const trusted = Uint8Array.from({ length: atoms.count }, (_, k) => (touches(k) ? 0 : 1));
    const again = understand(image, sampling, frame, atoms, trusted);
    const ranked = rankCauses(again);
    if (again.held && accounted(ranked) > accounted(ranking)) {
      seen = again;
      ranking = ranked;
    }
  }
  onProgress?.(1);
  return { seen, ranking };
}

/** A single fault that accounts for this much leaves nothing to look at again for. */
const PLAIN_SHARE = 0.9;

/** What the first cause accounts for. */
function accounted({ sampleFaults, imagerFaults }: Ranking): number {
  return Math.max(0, ...[...sampleFaults, ...imagerFaults].map(({ share }) => Math.min(1, share)));
}
