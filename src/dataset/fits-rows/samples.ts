/**
 * From the arrays of groups to samples in canonical order: row, sub-band, channel, polarization (fastest), whatever the
 * order of the axes in the file. The hot loops of reading.
 *
 * Everything becomes float32. A float64 or scaled value beyond float32 becomes infinite, and so counts as bad; a
 * positive weight too small for float32 becomes the smallest one, so that it does not turn into a flag.
 */
import type { SampleBlock, Shape } from "../dataset.ts";
import { readStored } from "../fits/stored.ts";
import type { GroupLayout } from "../random-groups/layout.ts";

/** Where the elements of a group lie, bytes. */
export interface SampleLayout {
  readonly bitpix: number;
  /** of a group, and of the first element in it */
  readonly groupBytes: number;
  readonly start: number;
  readonly shape: Shape;
  /** from one sub-band, channel, polarization to the next */
  readonly subbandStep: number;
  readonly channelStep: number;
  readonly polarizationStep: number;
  /** from the real part to the imaginary; the weight is twice as far */
  readonly complexStep: number;
  readonly hasWeight: boolean;
  readonly scale: number;
  readonly zero: number;
  readonly blank: number | undefined;
}

export function sampleLayout(layout: GroupLayout): SampleLayout {
  const { itemBytes, complex, stokes, frequency, subband } = layout;
  return {
    bitpix: layout.bitpix,
    groupBytes: layout.groupBytes,
    start: layout.parameterBytes,
    shape: { subbands: subband.length, channels: frequency.length, polarizations: stokes.length },
    subbandStep: subband.stride * itemBytes,
    channelStep: frequency.stride * itemBytes,
    polarizationStep: stokes.stride * itemBytes,
    complexStep: complex.stride * itemBytes,
    hasWeight: complex.length === 3,
    scale: layout.scale,
    zero: layout.zero,
    // Two-element arrays of 16-bit integers reserve the most negative one even where BLANK does not say so.
    blank: layout.blank ?? (complex.length === 2 && layout.bitpix === 16 ? -32768 : undefined),
  };
}

/** The usual file: float32 as it is, so that a sample is three loads and three stores. */
export function isPlainFloat(layout: SampleLayout): boolean {
  return layout.bitpix === -32 && layout.scale === 1 && layout.zero === 0 && layout.hasWeight;
}

/** Samples from float32 groups with weights and no scaling. */
export function fillPlainSamples(
  view: DataView,
  rows: number,
  layout: SampleLayout,
  block: SampleBlock,
): void {
  const { real, imag, weight } = block;
  const { subbands, channels, polarizations } = layout.shape;
  const { subbandStep, channelStep, polarizationStep, complexStep, groupBytes, start } = layout;
  const weightStep = 2 * complexStep;
  let i = 0;
  for (let row = 0; row < rows; row++) {
    for (let subband = 0; subband < subbands; subband++) {
      const subbandAt = row * groupBytes + start + subband * subbandStep;
      for (let channel = 0; channel < channels; channel++) {
        let at = subbandAt + channel * channelStep;
        for (let polarization = 0; polarization < polarizations; polarization++) {
          real[i] = view.getFloat32(at);
          imag[i] = view.getFloat32(at + complexStep);
          weight[i] = view.getFloat32(at + weightStep);
          i++;
          at += polarizationStep;
        }
      }
    }
  }
}

/** Weights alone, from float32 groups without scaling. */
export function fillPlainWeights(
  view: DataView,
  rows: number,
  layout: SampleLayout,
  weight: Float32Array,
): void {
  const { subbands, channels, polarizations } = layout.shape;
  const { subbandStep, channelStep, polarizationStep, complexStep, groupBytes, start } = layout;
  let i = 0;
  for (let row = 0; row < rows; row++) {
    for (let subband = 0; subband < subbands; subband++) {
      const subbandAt = row * groupBytes + start + subband * subbandStep + 2 * complexStep;
      for (let channel = 0; channel < channels; channel++) {
        let at = subbandAt + channel * channelStep;
        for (let polarization = 0; polarization < polarizations; polarization++) {
          weight[i++] = view.getFloat32(at);
          at += polarizationStep;
        }
      }
    }
  }
}

/** One weight and one scale for all samples of a group: what goes with two-element COMPLEX arrays. */
export interface GroupFactors {
  readonly weight: Float64Array;
  readonly scale: Float64Array;
}

/** Smallest positive float32. */
const LEAST_WEIGHT = 2 ** -149;

/**
 * Samples of any item type, scaled. An undefined value (BLANK) is NaN; in a two-element array it means that the sample
 * is flagged, and the weight turns negative.
 *
 * @param factors of two-element arrays: (rows) weight and scale
 * @param want false leaves `block.real` and `block.imag` alone
 */
export function fillScaledSamples(
  view: DataView,
  rows: number,
  layout: SampleLayout,
  factors: GroupFactors | undefined,
  block: SampleBlock,
  want: boolean,
): void {
  const { real, imag, weight } = block;
  const { subbands, channels, polarizations } = layout.shape;
  const { bitpix, complexStep, groupBytes, start, scale, zero, blank, hasWeight } = layout;
  let i = 0;
  for (let row = 0; row < rows; row++) {
    const rowScale = factors === undefined ? 1 : factors.scale[row]!;
    const rowWeight = factors === undefined ? 1 : factors.weight[row]!;
    for (let subband = 0; subband < subbands; subband++) {
      for (let channel = 0; channel < channels; channel++) {
        for (let polarization = 0; polarization < polarizations; polarization++) {
          const at =
            row * groupBytes +
            start +
            subband * layout.subbandStep +
            channel * layout.channelStep +
            polarization * layout.polarizationStep;
          const storedReal = readStored(view, bitpix, at);
          const storedImag = readStored(view, bitpix, at + complexStep);
          if (want) {
            real[i] = storedReal === blank ? Number.NaN : (zero + scale * storedReal) * rowScale;
            imag[i] = storedImag === blank ? Number.NaN : (zero + scale * storedImag) * rowScale;
          }
          let w = rowWeight;
          if (hasWeight) {
            const stored = readStored(view, bitpix, at + 2 * complexStep);
            w = stored === blank ? Number.NaN : zero + scale * stored;
          } else if (storedReal === blank || storedImag === blank) {
            w = -Math.abs(w);
          }
          weight[i] = w > 0 && w < LEAST_WEIGHT ? LEAST_WEIGHT : w;
          i++;
        }
      }
    }
  }
}
