/** What sources look like in the image: restored, and with the sidelobes of the dirty beam. */
import type { SkyImage } from "../image/sky-image.ts";
import type { Atoms } from "../samples/atoms.ts";
import { type ImageFrame, pixelOffset } from "../uv/frame.ts";
import type { UvTransformer } from "../uv/transformer.ts";
import { modelOf, PLAIN, type Source, type Visibilities } from "./model.ts";
import {
  addTo,
  gaussianOfMoments,
  gaussianTemplates,
  momentsOfGaussian,
  type PixelGaussian,
  type Template,
  wholeTemplate,
} from "./patch.ts";

/** What an image of sources is made with. */
export interface Imager {
  readonly image: SkyImage;
  readonly frame: ImageFrame;
  readonly transformer: UvTransformer;
  readonly atoms: Atoms;
  /** main lobe */
  readonly lobe: PixelGaussian;
  /** (atoms) imaging weights, a sum of 1 */
  readonly weights: Float64Array;
}

/** Pixel of a source, from the first. */
export function pixelOf({ image, frame }: Imager, { l, m }: Pick<Source, "l" | "m">): [number, number] {
  const [x, y] = pixelOffset(frame, l, m);
  return [x + (image.width >> 1), y + (image.height >> 1)];
}

/** Whether a source lies in the window of the image. */
export function isInside(imager: Imager, source: Pick<Source, "l" | "m">): boolean {
  const [x, y] = pixelOf(imager, source);
  return x >= -0.5 && y >= -0.5 && x < imager.image.width - 0.5 && y < imager.image.height - 0.5;
}

export function isExtended({ shape }: Source): boolean {
  return shape[0] !== 0 || shape[2] !== 0;
}

/** A source as a restored image shows it: convolved with the beam, its height that of a flux of 1. */
function restoredLook(
  { frame, lobe }: Imager,
  source: Source,
): { readonly gaussian: PixelGaussian; readonly height: number } {
  if (!isExtended(source)) return { gaussian: lobe, height: 1 };
  const own = momentsOfGaussian(frame, lobe);
  const sum = own.map((moment, i) => moment + source.shape[i]!) as [number, number, number];
  const area = ([ll, lm, mm]: readonly number[]) => Math.sqrt(ll! * mm! - lm! * lm!);
  return { gaussian: gaussianOfMoments(frame, sum), height: area(own) / area(sum) };
}

/** Height and derivatives by place of a source in the restored image, at a height of 1; null outside it. */
export function restoredTemplates(imager: Imager, source: Source): [Template, Template, Template] | null {
  const { gaussian } = restoredLook(imager, source);
  const { width, height } = imager.image;
  return gaussianTemplates(gaussian, ...pixelOf(imager, source), width, height);
}

/** The image that visibilities make: sum of T V exp(2 pi i (u l + v m)). */
export function imageOf(imager: Imager, { re, im }: Visibilities): Float64Array {
  const { transformer, atoms, weights, image } = imager;
  const out = new Float64Array(image.width * image.height);
  transformer.toImage(
    atoms.cycles,
    re.map((value, k) => value * weights[k]!),
    im.map((value, k) => value * weights[k]!),
    null,
    out,
  );
  return out;
}

/** What the dirty beam adds to the restored look of the sources. */
export function sidelobesOf(imager: Imager, sources: readonly Source[]): Float64Array {
  const out = imageOf(imager, modelOf(imager.atoms, sources, PLAIN, imager.frame.declination, false));
  for (const source of sources) {
    const made = restoredTemplates(imager, source);
    if (made === null) continue;
    addTo(out, imager.image.width, made[0], -source.flux * restoredLook(imager, source).height);
  }
  return out;
}

/** Height and place of every source, and the sidelobes that deconvolution would have taken away. */
export interface Nuisance {
  readonly templates: readonly Template[];
  /** place of the height of each source among them, -1 outside the image */
  readonly heightAt: readonly number[];
  /** place of the sidelobes, -1 without any */
  readonly sidelobesAt: number;
}

export function nuisanceOf(imager: Imager, sources: readonly Source[]): Nuisance {
  const { width, height } = imager.image;
  const templates: Template[] = [];
  const heightAt: number[] = [];
  for (const source of sources) {
    const made = isInside(imager, source) ? restoredTemplates(imager, source) : null;
    heightAt.push(made === null ? -1 : templates.length);
    if (made !== null) templates.push(...(isExtended(source) ? made.slice(0, 1) : made));
  }
  const points = sources.filter((source) => !isExtended(source) && isInside(imager, source));
  if (points.length === 0) return { templates, heightAt, sidelobesAt: -1 };
  templates.push(wholeTemplate(sidelobesOf(imager, points), width, height));
  return { templates, heightAt, sidelobesAt: templates.length - 1 };
}
