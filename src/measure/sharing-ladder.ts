/** Which samples of a row share a sketch when memory does not hold one each. */

/** Which sketch each sample of a row counts in; every map is a coarsening of the one before it. */
export interface SketchMap {
  readonly sketches: number;
  /** (samples of a row) */
  readonly sketch: Uint32Array;
}

/**
 * Maps of ever more channels to a sketch: one each, then 2, 4 ... all of a sub-band; at last one sketch for the row.
 *
 * @param first channels that share a sketch at the top of the ladder, a power of two or more than there are
 */
export function sharingLadder(
  shape: { readonly subbands: number; readonly channels: number; readonly polarizations: number },
  first = 1,
): SketchMap[] {
  const { subbands, channels, polarizations } = shape;
  const maps: SketchMap[] = [];
  for (let shared = first; ; shared *= 2) {
    const groups = Math.ceil(channels / shared);
    const sketch = new Uint32Array(subbands * channels * polarizations);
    for (let i = 0; i < sketch.length; i++) {
      const polarization = i % polarizations;
      const channel = Math.floor(i / polarizations) % channels;
      const subband = Math.floor(i / (polarizations * channels));
      sketch[i] = (subband * groups + Math.floor(channel / shared)) * polarizations + polarization;
    }
    maps.push({ sketches: subbands * groups * polarizations, sketch });
    if (groups === 1) break;
  }
  if (subbands * polarizations > 1) {
    maps.push({ sketches: 1, sketch: new Uint32Array(subbands * channels * polarizations) });
  }
  return maps;
}
