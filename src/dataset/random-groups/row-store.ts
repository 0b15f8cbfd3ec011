/** Where the groups lie in the file, and where the elements of their arrays lie in a group. */
import type { WeightColumns } from "../fits-rows/columns.ts";
import type { RowStore } from "../fits-rows/plan.ts";
import type { SampleLayout } from "../fits-rows/samples.ts";
import type { GroupLayout } from "./layout.ts";
import type { GroupColumns } from "./parameters.ts";
import { WORDS } from "./words.ts";

export function groupStore({ hdu, groups, groupBytes, parameterBytes }: GroupLayout): RowStore {
  return {
    place: hdu.header.place,
    word: WORDS.row,
    start: hdu.dataStart,
    rows: groups,
    rowBytes: groupBytes,
    needs: {
      rows: [{ offset: 0, bytes: parameterBytes }],
      weights: [{ offset: 0, bytes: groupBytes }],
    },
  };
}

export function sampleLayout(layout: GroupLayout): SampleLayout {
  const { itemBytes, complex, stokes, frequency, subband } = layout;
  return {
    bitpix: layout.bitpix,
    rowBytes: layout.groupBytes,
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

/** One weight and one scale a group. */
export function groupWeights({ weight, scale }: GroupColumns): WeightColumns {
  return { weights: weight === undefined ? [] : [weight], subbandStep: 0, polarizationStep: 0, scale };
}
