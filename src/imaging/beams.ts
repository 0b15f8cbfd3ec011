/** From weighted uv cells to what a report says of a beam: main lobe, sidelobes, noise, and its picture. */
import type { Weighting } from "../dataset/plan-request.ts";
import { beamAt } from "./beam-at.ts";
import { finerMiddle, KERNEL } from "./beam-resample.ts";
import { BeamTransform, type HalfBeam } from "./beam-transform.ts";
import { cellFactors, imageNoise, imagingWeight, truncated } from "./cell-weights.ts";
import type { Beam, BeamPicture } from "./image.ts";
import { type Ellipse, fitMainLobe, UNKNOWN_ELLIPSE } from "./main-lobe.ts";
import type { FilledCells, GridForm } from "./moment-grid.ts";
import type { Plan } from "./plan.ts";
import type { Sampling } from "./sampling.ts";
import { findSidelobes, type Sidelobes } from "./sidelobes.ts";

export const RADIANS_PER_ARCSEC = Math.PI / 180 / 3600;

/** Cells from the origin to the edge of the largest grid: beyond it the beam is computed over less than the field. */
const MOST_HALF = 1000;
/** Pixels across the field in the usual largest transform, and where a coarser one would miss the sidelobes. */
const USUAL_SIZE = 1024;
const LARGEST_SIZE = 2048;
const LEAST_SIZE = 64;
/** Samples a period of the finest fringe: 3 where they are cheap, never below 2 (Nyquist). */
const FINE_SAMPLING = 3;
const COARSE_SAMPLING = 2.05;
/** By samples (rows x channels): many fill so many cells that fewer moments of each give the same beam. */
const ORDERS = [
  { samples: 2e4, order: 5 },
  { samples: 1e6, order: 4 },
  { samples: 3e7, order: 3 },
] as const;
const LEAST_ORDER = 2;
const PICTURE_PIXELS = 161;
const PICTURE_PIXELS_PER_BEAM = 5;

/**
 * The grid for the planned field.
 * @param noiseBound no sum of weight^2 x variance exceeds it
 */
export function gridFormOf(sampling: Sampling, plan: Plan, noiseBound: number): GridForm {
  const field = plan.fieldOfView.value;
  // Tracks may be means over a time bin: a sample can lie a little further out.
  const extent = sampling.extent * 1.02;
  const known = field > 0 && extent > 0;
  const wanted = known ? field : 1;
  const whole = known ? Math.ceil(extent * wanted) + 2 : 2;
  const half = Math.min(whole, MOST_HALF);
  return {
    field: whole > MOST_HALF ? (MOST_HALF - 2) / extent : wanted,
    half,
    order: orderFor(sampling),
    // The sums of the survey are of 32-bit floats.
    weightBound: sampling.totalWeight * 1.01,
    noiseBound,
  };
}

function orderFor({ survey }: Sampling): number {
  const { subbands, channels } = survey.dataset.shape;
  const samples = survey.totals.rows * subbands * channels;
  return ORDERS.find((limit) => samples < limit.samples)?.order ?? LEAST_ORDER;
}

/** Beams of one grid form; keeps the transform's tables. */
export class BeamMaker {
  private readonly transform: BeamTransform;
  private readonly reach: number;
  /** full width of the field that the beam is computed over, radians */
  readonly field: number;

  constructor(form: GridForm) {
    this.field = form.field;
    const size = transformSize(form.half);
    this.transform = new BeamTransform(size);
    this.reach = size / 2 + 8;
  }

  make(cells: FilledCells, weighting: Weighting): MadeBeam {
    const factors = cellFactors(cells, weighting);
    if (cells.count === 0) return nothing(factors);
    const ellipse = fitMainLobe(cells, factors);
    const order = this.transform.size > USUAL_SIZE ? Math.min(3, cells.form.order) : cells.form.order;
    const half = this.transform.beam(truncated(cells, order), factors, this.reach);
    const weight = imagingWeight(cells, factors);
    const exact = (l: number, m: number) => beamAt(cells, factors, weight, l, m);
    const sidelobes = findSidelobes(half, ellipse, this.field, exact);
    return { ellipse, sidelobes, half, factors, noise: imageNoise(cells, factors), weight };
  }
}

export interface MadeBeam {
  readonly ellipse: Ellipse;
  readonly sidelobes: Sidelobes;
  /** null when no sample is usable */
  readonly half: HalfBeam | null;
  /** (cells) imaging factor */
  readonly factors: Float64Array;
  /** thermal rms, dataset unit; NaN unknown */
  readonly noise: number;
  /** sum of the imaging weights */
  readonly weight: number;
}

function nothing(factors: Float64Array): MadeBeam {
  const sidelobes = { peak: Number.NaN, east: Number.NaN, north: Number.NaN, rms: Number.NaN };
  return { ellipse: UNKNOWN_ELLIPSE, sidelobes, half: null, factors, noise: Number.NaN, weight: 0 };
}

function transformSize(half: number): number {
  const powerAbove = (value: number) => 2 ** Math.ceil(Math.log2(value));
  const fine = Math.max(LEAST_SIZE, powerAbove(FINE_SAMPLING * half));
  if (fine <= USUAL_SIZE) return fine;
  return COARSE_SAMPLING * half <= USUAL_SIZE ? USUAL_SIZE : LARGEST_SIZE;
}

/** As the report holds it. Noise is in Jy only where the amplitudes are. */
export function reportBeam(made: MadeBeam, calibrated: boolean): Beam {
  const { ellipse, sidelobes } = made;
  return {
    majorArcsec: ellipse.major / RADIANS_PER_ARCSEC,
    minorArcsec: ellipse.minor / RADIANS_PER_ARCSEC,
    positionAngleDeg: (ellipse.positionAngle * 180) / Math.PI,
    peakSidelobeFraction: sidelobes.peak,
    peakSidelobeEastArcsec: sidelobes.east / RADIANS_PER_ARCSEC,
    peakSidelobeNorthArcsec: sidelobes.north / RADIANS_PER_ARCSEC,
    rmsSidelobeFraction: sidelobes.rms,
    noiseJy: calibrated ? made.noise : Number.NaN,
  };
}

/** The middle of the beam, a fifth of the main lobe or less to a pixel; null without a beam. */
export function pictureOf(made: MadeBeam, weighting: string): BeamPicture | null {
  const { half, ellipse } = made;
  if (half === null) return null;
  const wanted = ellipse.minor > 0 ? Math.ceil((half.cell * PICTURE_PIXELS_PER_BEAM) / ellipse.minor) : 1;
  const finer = Math.max(1, Math.min(wanted, 8));
  // The interpolation reaches a few pixels beyond the picture's edge.
  const middle = Math.min((PICTURE_PIXELS - 1) / 2, (half.reach - KERNEL - 2) * finer);
  const size = 2 * middle + 1;
  const westFirst = finerMiddle(half, middle, finer);
  // East is to the left.
  const pixels = westFirst.map((_, at) => westFirst[at - (at % size) + size - 1 - (at % size)]!);
  return { weighting, size, cellArcsec: half.cell / finer / RADIANS_PER_ARCSEC, pixels };
}
