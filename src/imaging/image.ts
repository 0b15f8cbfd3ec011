/**
 * What the planned image will be like: the report's `image` object. Units are in the keys, so that it can be
 * written to JSON as it stands. NaN becomes null there.
 */

export interface Beam {
  /** full width at half maximum of the elliptical Gaussian fitted to the main lobe */
  readonly majorArcsec: number;
  readonly minorArcsec: number;
  /** north through east, -90..90 */
  readonly positionAngleDeg: number;
  /** largest |sidelobe| inside the field, fraction of the peak, with its sign */
  readonly peakSidelobeFraction: number;
  readonly peakSidelobeEastArcsec: number;
  readonly peakSidelobeNorthArcsec: number;
  readonly rmsSidelobeFraction: number;
  /** thermal rms of the image from the measured noise; NaN where noise is unknown */
  readonly noiseJy: number;
}

export interface WeightingResult {
  readonly weighting: "natural" | "uniform" | "robust";
  readonly robust: number | null;
  /** the plan's own choice */
  readonly planned: boolean;
  readonly before: Beam;
  /** null when nothing is suggested for flagging */
  readonly after: Beam | null;
}

export interface WTerm {
  readonly largestWavelengths: number;
  /** |phase| of the largest |w| at the field edge */
  readonly edgePhaseRad: number;
  /** peak lost there by a point source, weighted coherent sum over the samples */
  readonly edgeLossFraction: number;
  /** full width of the field that needs no correction at `phaseLimitRad` */
  readonly uncorrectedFieldArcsec: number;
  readonly phaseLimitRad: number;
  readonly planes: number;
  readonly facets: number;
  /** false where w is all zero or missing and positions do not give it */
  readonly known: boolean;
}

export interface Smearing {
  readonly bandwidthLossFraction: number;
  readonly timeLossFraction: number;
  /** averaging that loses no more than `safeLossFraction` at the edge */
  readonly safeChannelHz: number;
  readonly safeIntegrationSeconds: number;
  readonly safeLossFraction: number;
}

export interface Coverage {
  /** cells of 1/field filled, of those within the annulus of the plan's scales */
  readonly filledFraction: number;
  readonly largestRadialGapWavelengths: number;
  readonly radialGapFromWavelengths: number;
  readonly radialGapToWavelengths: number;
  /** outer over inner radius of that gap */
  readonly largestRadialGapRatioFraction: number;
  readonly largestAzimuthalGapRad: number;
  /** direction of its middle, north through east, and the annulus it is in */
  readonly azimuthalGapAtRad: number;
  readonly azimuthalGapFromWavelengths: number;
  readonly azimuthalGapToWavelengths: number;
  readonly shortestSpacingWavelengths: number;
  readonly longestSpacingWavelengths: number;
  /** flux of a Gaussian of the plan's largest scale that the shortest spacing misses */
  readonly missingFluxFraction: number;
}

/** A cause that caps the dynamic range, worst first in `ImageForecast.limits`. */
export interface Limit {
  readonly cause: string;
  /** peak over rms that this cause alone allows */
  readonly dynamicRangeFraction: number;
  readonly text: string;
}

/** Plain words and numbers for the imaging run. */
export interface Advice {
  readonly name: string;
  readonly value: string;
  readonly why: string;
}

export interface ImageForecast {
  readonly weightings: readonly WeightingResult[];
  readonly wTerm: WTerm;
  readonly smearing: Smearing;
  readonly coverage: { readonly before: Coverage; readonly after: Coverage | null };
  readonly limits: readonly Limit[];
  readonly advice: readonly Advice[];
}

/** The dirty beam's middle as pixels, for the page. */
export interface BeamPicture {
  readonly weighting: string;
  /** pixels a side, odd: the middle pixel is the peak */
  readonly size: number;
  readonly cellArcsec: number;
  /** (size x size) fraction of the peak; row 0 is south, column 0 is east (east to the left, as on the sky) */
  readonly pixels: Float32Array;
}
