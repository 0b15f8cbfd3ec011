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
  private u = 0;
  private v = 0;
  private setup = 0;

  constructor(dataset: Dataset, order: number) {
    this.channels = dataset.shape.channels;
    this.frequencies = dataset.setups.map((setup) => setup.frequencies);
    this.logs = this.frequencies.map((frequencies) => frequencies.map(Math.log));
    this.nodes = order + 1;
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
      if (channels > 1 && reach * step * 2 * nodes <= 1) this.addRuns(grid, row, first, first + channels);
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

  /** Runs of channels in one cell are gathered before they are added. */
  private addRuns(grid: UvSink, row: RowWeights, first: number, last: number): void {
    const { sums, nodes } = this;
    const frequencies = this.frequencies[this.setup]!;
    const u = this.u * grid.form.field;
    const v = this.v * grid.form.field;
    let runU = Number.NaN;
    let runV = Number.NaN;
    let start = 0;
    let span = 0;
    let count = 0;
    let noise = 0;
    for (let c = first; c < last; c++) {
      const weight = row.weight[c]!;
      if (weight === 0) continue;
      const frequency = frequencies[c]!;
      const cellU = Math.floor(u * frequency + 0.5);
      const cellV = Math.floor(v * frequency + 0.5);
      if (cellU !== runU || cellV !== runV) {
        this.flush(grid, start, span, count, noise);
        runU = cellU;
        runV = cellV;
        start = frequency;
        count = 0;
        noise = 0;
        sums.fill(0);
      }
      span = frequency - start;
      let power = weight;
      for (let k = 0; k < nodes; k++) {
        sums[k]! += power;
        power *= span;
      }
      count += 1;
      noise += row.noise[c]!;
    }
    this.flush(grid, start, span, count, noise);
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
