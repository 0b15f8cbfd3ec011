/**
 * Images by direct sum, sample by sample and pixel by pixel: slow, plain, and with nothing in common with what is tested.
 * I(l, m) = sum T V exp(2 pi i (u l + v m)) / sum T, natural weighting (Thompson, Moran & Swenson 2017, section 10.2).
 */
import type { Dataset } from "../../../src/dataset/dataset.ts";

export interface TrueSource {
  /** Jy */
  readonly flux: number;
  /** direction cosines */
  readonly l: number;
  readonly m: number;
  /** full width at half maximum of a round Gaussian, radians; 0 a point */
  readonly width?: number;
}

export interface Grid {
  /** pixels a side; pixel size / 2 is the phase centre */
  readonly size: number;
  /** radians */
  readonly cell: number;
}

/** Visibilities in wavelengths, total intensity. */
export interface Samples {
  readonly count: number;
  readonly u: Float64Array;
  readonly v: Float64Array;
  readonly w: Float64Array;
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly weight: Float64Array;
}

export async function samplesOf(dataset: Dataset): Promise<Samples> {
  const { subbands, channels, polarizations } = dataset.shape;
  const most = dataset.rows * subbands * channels;
  const [u, v, w, re, im, weight] = Array.from({ length: 6 }, () => new Float64Array(most)) as [
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
    Float64Array,
  ];
  const { frequencies } = dataset.setups[0]!;
  let count = 0;
  for await (const block of dataset.blocks({ want: "samples" })) {
    for (let row = 0; row < block.rows; row++) {
      for (let c = 0; c < subbands * channels; c++) {
        let [x, y, total] = [0, 0, 0];
        for (let p = 0; p < polarizations; p++) {
          const at = (row * subbands * channels + c) * polarizations + p;
          if (!(block.weight[at]! > 0)) continue;
          x += block.weight[at]! * block.real[at]!;
          y += block.weight[at]! * block.imag[at]!;
          total += block.weight[at]!;
        }
        if (total === 0) continue;
        u[count] = block.u[row]! * frequencies[c]!;
        v[count] = block.v[row]! * frequencies[c]!;
        w[count] = block.w[row]! * frequencies[c]!;
        re[count] = x / total;
        im[count] = y / total;
        weight[count] = total;
        count += 1;
      }
    }
  }
  return { count, u, v, w, re, im, weight };
}

/**
 * The samples and so many times those of the sources, as an imager that knows of no channel width or integration time
 * has them: with the phases of w, or without.
 */
export function plus(
  samples: Samples,
  times: number,
  sources: readonly TrueSource[],
  withW: boolean,
): Samples {
  const [re, im] = [samples.re.slice(), samples.im.slice()];
  for (const { flux, l, m, width = 0 } of sources) {
    const nMinus1 = withW ? Math.sqrt(1 - l * l - m * m) - 1 : 0;
    for (let k = 0; k < samples.count; k++) {
      const phase = -2 * Math.PI * (samples.u[k]! * l + samples.v[k]! * m + samples.w[k]! * nMinus1);
      const spacing = Math.hypot(samples.u[k]!, samples.v[k]!);
      const size = times * flux * Math.exp(-((Math.PI * width * spacing) ** 2) / (4 * Math.LN2));
      re[k]! += size * Math.cos(phase);
      im[k]! += size * Math.sin(phase);
    }
  }
  return { ...samples, re, im };
}

/** Row 0 is south, column 0 is east, as FITS images of the sky mostly are. */
export function dirtyImage(samples: Samples, { size, cell }: Grid): Float64Array {
  const image = new Float64Array(size * size);
  const [cosines, sines] = [new Float64Array(size), new Float64Array(size)];
  let total = 0;
  for (let k = 0; k < samples.count; k++) {
    const [u, v, weight] = [samples.u[k]!, samples.v[k]!, samples.weight[k]!];
    total += weight;
    for (let x = 0; x < size; x++) {
      const phase = 2 * Math.PI * u * (size / 2 - x) * cell;
      cosines[x] = Math.cos(phase);
      sines[x] = Math.sin(phase);
    }
    for (let y = 0; y < size; y++) {
      const phase = 2 * Math.PI * v * (y - size / 2) * cell;
      const re = weight * (samples.re[k]! * Math.cos(phase) - samples.im[k]! * Math.sin(phase));
      const im = weight * (samples.re[k]! * Math.sin(phase) + samples.im[k]! * Math.cos(phase));
      const row = y * size;
      for (let x = 0; x < size; x++) image[row + x]! += re * cosines[x]! - im * sines[x]!;
    }
  }
  return image.map((value) => value / total);
}

/** The sources as Gaussians of this full width at half maximum, each of the height of its flux (Jy a beam). */
export function restored(sources: readonly TrueSource[], beam: number, { size, cell }: Grid): Float64Array {
  const image = new Float64Array(size * size);
  for (const { flux, l, m, width = 0 } of sources) {
    const squared = beam * beam + width * width;
    const height = (flux * beam * beam) / squared;
    for (let y = 0; y < size; y++) {
      for (let x = 0; x < size; x++) {
        const [dl, dm] = [(size / 2 - x) * cell - l, (y - size / 2) * cell - m];
        image[y * size + x]! += height * Math.exp((-4 * Math.LN2 * (dl * dl + dm * dm)) / squared);
      }
    }
  }
  return image;
}
