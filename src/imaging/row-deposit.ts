/** Adds the channels of one row to a uv grid and to a tally of its coverage. */
import type { Dataset, SampleBlock } from "../dataset/dataset.ts";
import type { CoverageTally } from "./coverage-tally.ts";
import type { GridForm } from "./moment-grid.ts";
import type { RowWeights } from "./row-weights.ts";
import { fillNodeWeights, lagrangeCoefficients } from "./run-nodes.ts";

/** What samples are added to. */
export interface UvSink {
  readonly form: GridForm;
  /** @param u,v wavelengths */
  add(u: number, v: number, weight: number, noise: number): void;
}

export class RowDeposit {
  private readonly channels: number;
  /** by setup: (subbands x channels) Hz, and its natural log */
  private readonly frequencies: readonly Float64Array[];
  private readonly logs: readonly Float64Array[];
  private readonly nodes: number;
  private readonly coefficients: Float64Array;
  private readonly sums: Float64Array;
  private readonly nodeWeights: Float64Array;
  private readonly powers: Float64Array;
  /** by setup: (subbands) 1 where channels lie evenly */
  private readonly even: readonly Uint8Array[];
  private u = 0;
  private v = 0;
  private setup = 0;

  constructor(dataset: Dataset, order: number) {
    this.channels = dataset.shape.channels;
    this.frequencies = dataset.setups.map((setup) => setup.frequencies);
    this.logs = this.frequencies.map((frequencies) => frequencies.map(Math.log));
    this.nodes = order + 1;
    this.powers = powerSums(this.channels, this.nodes);
    this.even = this.frequencies.map((frequencies) => evenSubbands(frequencies, this.channels));
    this.coefficients = lagrangeCoefficients(this.nodes);
    this.sums = new Float64Array(this.nodes);
    this.nodeWeights = new Float64Array(this.nodes);
  }

  /** The row that the next calls are about. */
  place(block: SampleBlock, row: number): void {
    this.u = block.u[row]!;
    this.v = block.v[row]!;
    this.setup = block.setup[row]!;
  }

  /** Count (or with -1 take out) what the row covers in the sub-bands that were filled. */
  cover(coverage: CoverageTally, row: RowWeights, count: 1 | -1, first = row.first, last = row.last): void {
    const { channels } = this;
    const radius = Math.log(Math.hypot(this.u, this.v));
    const direction = Math.atan2(this.u, this.v);
    const logs = this.logs[this.setup]!;
    for (let s = first; s < last; s++) {
      let low = Number.POSITIVE_INFINITY;
      let high = Number.NEGATIVE_INFINITY;
      for (let c = s * channels; c < (s + 1) * channels; c++) {
        if (row.weight[c] === 0) continue;
        if (logs[c]! < low) low = logs[c]!;
        if (logs[c]! > high) high = logs[c]!;
      }
      if (low <= high) coverage.add(radius + low, radius + high, direction, count);
    }
  }

  addTo(grid: UvSink, row: RowWeights): void {
    const { u, v, channels, nodes } = this;
    const frequencies = this.frequencies[this.setup]!;
    const reach = Math.max(Math.abs(u), Math.abs(v)) * grid.form.field;
    for (let s = row.first; s < row.last; s++) {
      const first = s * channels;
      const step = channels > 1 ? Math.abs(frequencies[first + 1]! - frequencies[first]!) : 0;
      // Gathering pays where a cell holds more channels than a run becomes points.
      if (this.even[this.setup]![s] === 1 && reach * step * 2 * nodes <= 1)
        this.addRuns(grid, row, first, first + channels);
      else this.addEach(grid, row, first, first + channels);
    }
  }

  private addEach(grid: UvSink, row: RowWeights, first: number, last: number): void {
    const { u, v } = this;
    const frequencies = this.frequencies[this.setup]!;
    for (let c = first; c < last; c++) {
      const weight = row.weight[c]!;
      if (weight > 0) grid.add(u * frequencies[c]!, v * frequencies[c]!, weight, row.noise[c]!);
    }
  }

  /**
   * Runs of channels in one cell are gathered before they are added; in a run, stretches of one weight at once, by the
   * sums of the powers of their places.
   */
  private addRuns(grid: UvSink, row: RowWeights, first: number, last: number): void {
    const { sums, nodes } = this;
    const frequencies = this.frequencies[this.setup]!;
    const { weight, noise } = row;
    const powers = this.powers;
    const step = frequencies[first + 1]! - frequencies[first]!;
    let c = first;
    while (c < last) {
      if (weight[c] === 0) {
        c += 1;
        continue;
      }
      const start = c;
      const end = this.endOfRun(grid, start, last, step);
      sums.fill(0);
      let count = 0;
      let final = start;
      let noiseSum = 0;
      while (c < end) {
        const from = c;
        const value = weight[from]!;
        while (c < end && weight[c] === value) c += 1;
        if (value === 0) continue;
        for (let i = from; i < c; i++) noiseSum += noise[i]!;
        let scale = value;
        for (let k = 0, at = (c - start) * nodes, before = (from - start) * nodes; k < nodes; k++) {
          sums[k]! += scale * (powers[at + k]! - powers[before + k]!);
          scale *= step;
        }
        count += c - from;
        final = c - 1;
      }
      this.flush(grid, frequencies[start]!, frequencies[final]! - frequencies[start]!, count, noiseSum);
    }
  }

  /** One past the last channel, before `last`, that lies in the cell of channel `start`. */
  private endOfRun(grid: UvSink, start: number, last: number, step: number): number {
    const frequencies = this.frequencies[this.setup]!;
    const u = this.u * grid.form.field;
    const v = this.v * grid.form.field;
    const cellU = Math.floor(u * frequencies[start]! + 0.5);
    const cellV = Math.floor(v * frequencies[start]! + 0.5);
    const inCell = (c: number) =>
      Math.floor(u * frequencies[c]! + 0.5) === cellU && Math.floor(v * frequencies[c]! + 0.5) === cellV;
    // About there, if channels lie evenly; then by the channels themselves.
    const channels = Math.min(
      channelsLeft(u * frequencies[start]! + 0.5 - cellU, u * step),
      channelsLeft(v * frequencies[start]! + 0.5 - cellV, v * step),
    );
    let end = Math.min(last, start + 1 + Math.floor(channels));
    while (end > start + 1 && !inCell(end - 1)) end -= 1;
    while (end < last && inCell(end)) end += 1;
    return end;
  }

  private flush(grid: UvSink, start: number, span: number, count: number, noise: number): void {
    const { u, v, nodeWeights, nodes } = this;
    if (count === 0) return;
    if (count === 1 || span === 0) {
      grid.add(u * start, v * start, this.sums[0]!, noise);
      return;
    }
    fillNodeWeights(this.coefficients, this.sums, span, nodeWeights);
    for (let j = 0; j < nodes; j++) {
      const frequency = start + (span * j) / (nodes - 1);
      grid.add(u * frequency, v * frequency, nodeWeights[j]!, j === 0 ? noise : 0);
    }
  }
}

/** Share of a channel by which channels may lie off their even places. */
const UNEVEN = 1e-6;

/** (subbands) 1 where the channels, at least two, lie evenly along the band. */
function evenSubbands(frequencies: Float64Array, channels: number): Uint8Array {
  return Uint8Array.from({ length: frequencies.length / channels }, (_, s) => {
    if (channels < 2) return 0;
    const own = frequencies.subarray(s * channels, (s + 1) * channels);
    const step = own[1]! - own[0]!;
    return own.every((f, c) => Math.abs(f - own[0]! - c * step) <= UNEVEN * Math.abs(step) * channels)
      ? 1
      : 0;
  });
}

/** Steps from a place in a cell, 0..1, to its edge. */
function channelsLeft(place: number, step: number): number {
  if (step === 0) return Number.POSITIVE_INFINITY;
  return step > 0 ? (1 - place) / step : place / -step;
}

/** (channels + 1 x nodes) sums of j^k over j below each number of channels. */
function powerSums(channels: number, nodes: number): Float64Array {
  const sums = new Float64Array((channels + 1) * nodes);
  for (let j = 0; j < channels; j++) {
    let power = 1;
    for (let k = 0; k < nodes; k++) {
      sums[(j + 1) * nodes + k] = sums[j * nodes + k]! + power;
      power *= j;
    }
  }
  return sums;
}
