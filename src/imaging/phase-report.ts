/** Antenna positions by the phases of the survey's tracks. */
import { type PhaseMoment, type PhaseOffset, phaseOffsets } from "../geometry/phase-positions.ts";
import { siderealTimeOf } from "../geometry/sidereal.ts";
import { hourAngle } from "../geometry/uvw.ts";
import { frequencyRange, type Sampling, trackOffset } from "./sampling.ts";
import { momentsOf } from "./w-report.ts";

/** Moments are enough to follow a phase that turns by metres a day. */
const MOST_MOMENTS = 300;
/** Fits at two frequencies that differ by more than this many sigmas are of no position. */
const AGREEMENT_SIGMAS = 3;

/** By antenna number; empty where no source dominates, or the hours are too few. */
export function phasePositions(sampling: Sampling): ReadonlyMap<number, PhaseOffset> {
  const { survey, field } = sampling;
  const { baselines, dataset } = survey;
  const found = new Map<number, PhaseOffset>();
  if (!Number.isFinite(field.declination + field.rightAscension)) return found;
  const numbers = [...new Set(baselines.flatMap((b) => [b.antenna1, b.antenna2]))].sort((a, b) => a - b);
  const moments = momentsOf(sampling, MOST_MOMENTS);
  const fits = outerSubbands(sampling).map(({ subband, frequency }) => {
    const series = moments.map(({ start, cells }) => momentOf(sampling, numbers, start, cells, subband));
    return phaseOffsets(numbers.length, series, frequency, field.declination);
  });
  if (fits.length === 0 || dataset.setups.length > 1) return found;
  numbers.forEach((number, i) => {
    const own = fits.map((fit) => fit?.[i] ?? null);
    if (own.every((fit): fit is PhaseOffset => fit !== null)) found.set(number, combined(own));
  });
  return found;
}

/** The lowest and the highest used sub-band: a position turns phases in proportion to frequency. */
function outerSubbands(sampling: Sampling): { subband: number; frequency: number }[] {
  const { low, high } = frequencyRange(sampling.survey.dataset, sampling.channelUsed);
  const used = Array.from({ length: sampling.survey.dataset.shape.subbands }, (_, subband) => ({
    subband,
    frequency: (low[subband]! + high[subband]!) / 2,
  })).filter(({ frequency }) => frequency > 0);
  used.sort((a, b) => a.frequency - b.frequency);
  return used.length < 2 ? used : [used[0]!, used.at(-1)!];
}

function momentOf(
  sampling: Sampling,
  numbers: readonly number[],
  time: number,
  cells: readonly number[],
  subband: number,
): PhaseMoment {
  const { survey, products, field } = sampling;
  const { tracks, baselines, dataset } = survey;
  const index = new Map(numbers.map((number, i) => [number, i]));
  const real = new Float64Array(cells.length);
  const imag = new Float64Array(cells.length);
  const weight = new Float64Array(cells.length);
  cells.forEach((cell, k) => {
    // One product: two would mix their instrumental phases.
    const at = trackOffset(dataset, cell, subband) + products[0]!;
    const value = tracks.weight[at]!;
    const known = tracks.usable[at]! > 0 && Number.isFinite(tracks.real[at]! + tracks.imag[at]!);
    if (!known || !(value > 0 && value < Number.POSITIVE_INFINITY)) return;
    real[k] = tracks.real[at]!;
    imag[k] = tracks.imag[at]!;
    weight[k] = value;
  });
  return {
    graph: {
      antennas: numbers.length,
      first: Int32Array.from(cells, (cell) => index.get(baselines[tracks.baseline[cell]!]!.antenna1)!),
      second: Int32Array.from(cells, (cell) => index.get(baselines[tracks.baseline[cell]!]!.antenna2)!),
    },
    real,
    imag,
    weight,
    hourAngle: hourAngle(siderealTimeOf(dataset.array, time), field.rightAscension),
  };
}

/** The mean of fits that agree; of those that do not, the difference is the error. */
function combined(fits: readonly PhaseOffset[]): PhaseOffset {
  const first = fits[0]!;
  const last = fits.at(-1)!;
  const apart = Math.abs(first.offset - last.offset);
  const error = Math.hypot(first.error, last.error) / Math.SQRT2;
  return {
    offset: (first.offset + last.offset) / 2,
    error: apart > AGREEMENT_SIGMAS * error * Math.SQRT2 ? Math.max(apart, error) : error,
  };
}
