/**
 * The visibilities that an image is made from, small enough to be held: one atom a baseline, time and channel, total
 * intensity, seen from the image's reference point. Where that would be too many, neighbours in time and channel are
 * averaged. One pass over the samples.
 */
import type { SampleBlock } from "../../dataset/dataset.ts";
import type { Sampling } from "../../imaging/sampling.ts";
import { fillWeightedVariance, medianKnown } from "../../imaging/thermal.ts";
import { cyclesX, cyclesY, type ImageFrame } from "../uv/frame.ts";
import type { Frequencies } from "../uv/transformer.ts";
import { AtomSums } from "./atom-sums.ts";
import { type Bins, binsOf } from "./bins.ts";

export interface Atoms {
  readonly count: number;
  readonly bins: Bins;
  /** (count) index into Survey.baselines, of time bin and of channel bin */
  readonly baseline: Int32Array;
  readonly time: Int32Array;
  readonly channel: Int32Array;
  /** (count) Hz, mean */
  readonly frequency: Float64Array;
  /** (count) wavelengths, from the image's reference point */
  readonly u: Float64Array;
  readonly v: Float64Array;
  readonly w: Float64Array;
  /** (count) the same as cycles a pixel */
  readonly cycles: Frequencies;
  /** (count) mean visibility, dataset unit, phases from the image's reference point */
  readonly re: Float64Array;
  readonly im: Float64Array;
  /** (count) sum of weights */
  readonly weight: Float64Array;
  /** weight times the variance of a real part: the median of the dataset; NaN unknown */
  readonly noise: number;
  /** sign of the exponent that the file's phases have: -1 as usual, +1 the other way */
  readonly conjugated: boolean;
}

export interface AtomRequest {
  readonly sampling: Sampling;
  readonly frame: ImageFrame;
  /** Hz: channels whose centre lies outside are left out; null: none */
  readonly frequencies: { readonly low: number; readonly high: number } | null;
  readonly onProgress?: (share: number) => void;
}

export async function gatherAtoms(request: AtomRequest): Promise<Atoms> {
  const { sampling, frame } = request;
  const { survey } = sampling;
  const { dataset } = survey;
  const bins = binsOf(sampling, request.frequencies);
  const sums = new AtomSums(bins, survey.baselines.length);
  const index = new Map(
    survey.baselines.map(({ antenna1, antenna2 }, i) => [pairKey(antenna1, antenna2), i]),
  );
  const row = new RowAdder(sampling, frame, bins, sums);
  for await (const block of dataset.blocks({ want: "samples" })) {
    for (let r = 0; r < block.rows; r++) {
      if (block.field[r] !== sampling.field.id || block.antenna1[r] === block.antenna2[r]) continue;
      const baseline = index.get(pairKey(block.antenna1[r]!, block.antenna2[r]!));
      if (baseline !== undefined) row.add(block, r, baseline);
    }
    request.onProgress?.(dataset.rows === 0 ? 1 : (block.firstRow + block.rows) / dataset.rows);
  }
  const noise = medianKnown(fillWeightedVariance(sampling), 0);
  return finished(sums, bins, frame, noise);
}

/** The two antennas either way round. */
function pairKey(antenna1: number, antenna2: number): number {
  return antenna1 < antenna2 ? antenna1 * 65536 + antenna2 : antenna2 * 65536 + antenna1;
}

/** Adds a row to the sums: products by weight, turned to the reference point of the image. */
class RowAdder {
  private readonly sampling: Sampling;
  private readonly frame: ImageFrame;
  private readonly bins: Bins;
  private readonly sums: AtomSums;
  private readonly lowFirst: readonly boolean[];

  constructor(sampling: Sampling, frame: ImageFrame, bins: Bins, sums: AtomSums) {
    this.sampling = sampling;
    this.frame = frame;
    this.bins = bins;
    this.sums = sums;
    this.lowFirst = sampling.survey.baselines.map(({ antenna1, antenna2 }) => antenna1 <= antenna2);
  }

  add(block: SampleBlock, row: number, baseline: number): void {
    const { bins, sums, frame, sampling } = this;
    const { dataset } = sampling.survey;
    const time = bins.timeOf(block.time[row]!);
    if (time < 0) return;
    // Baselines are held with the lower antenna first, as everywhere after the survey.
    const sign = block.antenna1[row]! <= block.antenna2[row]! === this.lowFirst[baseline] ? 1 : -1;
    const [u0, v0, w0] = [sign * block.u[row]!, sign * block.v[row]!, sign * block.w[row]!];
    if (!Number.isFinite(u0 + v0)) return;
    const wKnown = Number.isFinite(w0) ? w0 : 0;
    const { turn } = frame;
    const u = frame.same ? u0 : turn[0]! * u0 + turn[1]! * v0 + turn[2]! * wKnown;
    const v = frame.same ? v0 : turn[3]! * u0 + turn[4]! * v0 + turn[5]! * wKnown;
    const w = frame.same ? wKnown : turn[6]! * u0 + turn[7]! * v0 + turn[8]! * wKnown;
    const { frequencies } = dataset.setups[block.setup[row]!] ?? dataset.setups[0]!;
    const { subbands, channels, polarizations } = dataset.shape;
    const base = row * subbands * channels * polarizations;
    for (let c = 0; c < subbands * channels; c++) {
      const bin = bins.channelOf[c]!;
      if (bin < 0) continue;
      const nu = frequencies[c]!;
      // V' = V exp(2 pi i (w' - w)): the phase is counted from another place.
      const phase = frame.same ? 0 : 2 * Math.PI * nu * (w - wKnown);
      const [cos, sin] = phase === 0 ? [1, 0] : [Math.cos(phase), Math.sin(phase)];
      for (let i = 0; i < sampling.products.length; i++) {
        const at = base + c * polarizations + sampling.products[i]!;
        const weight = block.weight[at]!;
        const x = block.real[at]!;
        const y = sign * block.imag[at]!;
        if (!(weight > 0 && weight < Number.POSITIVE_INFINITY)) continue;
        if (!Number.isFinite(x + y) || (x === 0 && y === 0)) continue;
        sums.add(baseline, time, bin, weight, nu, u, v, w, x * cos - y * sin, x * sin + y * cos);
      }
    }
  }
}

function finished(sums: AtomSums, bins: Bins, frame: ImageFrame, noise: number): Atoms {
  const filled = sums.filled();
  const count = filled.length;
  const frequency = new Float64Array(count);
  const [u, v, w] = [new Float64Array(count), new Float64Array(count), new Float64Array(count)];
  const [re, im, weight] = [new Float64Array(count), new Float64Array(count), new Float64Array(count)];
  const cycles = { x: new Float64Array(count), y: new Float64Array(count) };
  const [baseline, time, channel] = [new Int32Array(count), new Int32Array(count), new Int32Array(count)];
  for (let i = 0; i < count; i++) {
    const at = filled[i]!;
    const total = sums.weight[at]!;
    frequency[i] = sums.frequency[at]! / total;
    u[i] = sums.u[at]! / total;
    v[i] = sums.v[at]! / total;
    w[i] = sums.w[at]! / total;
    re[i] = sums.re[at]! / total;
    im[i] = sums.im[at]! / total;
    weight[i] = total;
    cycles.x[i] = cyclesX(frame, u[i]!, v[i]!);
    cycles.y[i] = cyclesY(frame, u[i]!, v[i]!);
    channel[i] = at % bins.channels;
    time[i] = Math.floor(at / bins.channels) % bins.times;
    baseline[i] = Math.floor(at / bins.channels / bins.times);
  }
  return {
    count,
    bins,
    baseline,
    time,
    channel,
    frequency,
    u,
    v,
    w,
    cycles,
    re,
    im,
    weight,
    noise,
    conjugated: false,
  };
}

/** The same data read with the other sign of the exponent. */
export function conjugatedAtoms(atoms: Atoms): Atoms {
  const negative = (values: Float64Array) => values.map((value) => -value);
  return { ...atoms, im: negative(atoms.im), conjugated: true };
}
