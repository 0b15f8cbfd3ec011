/**
 * A dataset held in arrays, for tests that need to say exactly what every row and sample is. It hands out its rows as a
 * reader does: in blocks, in buffers of the call that the caller may overwrite.
 */
import type {
  Antenna,
  BlockRequest,
  Dataset,
  Polarization,
  SampleBlock,
  Shape,
} from "../../src/dataset/dataset.ts";

export interface MemoryRow {
  /** MJD, days */
  readonly time: number;
  readonly antenna1: number;
  readonly antenna2: number;
  /** seconds of light travel */
  readonly u?: number;
  readonly v?: number;
  readonly w?: number;
  readonly field?: number;
  readonly setup?: number;
  readonly subarray?: number;
  /** seconds; default 10 */
  readonly integration?: number;
}

/** One sample: real, imaginary, weight. */
export type MemorySample = readonly [re: number, im: number, weight: number];

export interface MemoryData {
  readonly rows: readonly MemoryRow[];
  readonly subbands?: number;
  readonly channels?: number;
  readonly polarizations?: readonly Polarization[];
  /** value of a sample of a row; default 1 + 0i with weight 1 */
  readonly sample?: (row: number, subband: number, channel: number, polarization: number) => MemorySample;
  /** what else differs from the default dataset */
  readonly dataset?: Partial<Dataset>;
}

/** MJD of the first integration of tests that do not care. */
export const START = 60_000.5;

/** Rows of every baseline of antennas 1 to n at each of `times` integrations of `seconds`, time by time. */
export function gridRows(antennas: number, times: number, seconds = 10, start = START): MemoryRow[] {
  const rows: MemoryRow[] = [];
  for (let t = 0; t < times; t++) {
    for (let a = 1; a <= antennas; a++) {
      for (let b = a + 1; b <= antennas; b++) {
        const length = 1e-7 * (b - a);
        const turn = 1e-3 * t;
        rows.push({
          time: start + (t * seconds) / 86_400,
          antenna1: a,
          antenna2: b,
          u: length * Math.cos(turn),
          v: length * Math.sin(turn),
          w: 1e-8 * (a + b),
          integration: seconds,
        });
      }
    }
  }
  return rows;
}

export function memoryDataset(data: MemoryData): Dataset {
  const { rows, subbands = 1, channels = 1, polarizations = ["RR"] } = data;
  const shape: Shape = { subbands, channels, polarizations: polarizations.length };
  const samples = fillSamples(data, shape);
  const numbers = [...new Set(rows.flatMap(({ antenna1, antenna2 }) => [antenna1, antenna2]))];
  const antennas: Antenna[] = numbers
    .sort((a, b) => a - b)
    .map((number) => ({ number, name: `N${number}`, position: null, diameter: null }));
  return {
    name: "in-memory",
    files: [],
    bytes: 0,
    format: "simulated",
    header: {},
    array: {
      name: "invented",
      frame: "unknown",
      antennas,
      fromTable: true,
      siderealTimeAtReference: null,
      degreesPerDay: 360.9856,
      referenceDay: null,
      ut1MinusUtc: 0,
      timeSystem: "UTC",
    },
    fields: [...new Set(rows.map((row) => row.field ?? 1))]
      .sort((a, b) => a - b)
      .map((id) => ({ id, name: `field ${id}`, rightAscension: 0, declination: 0, equinox: 2000 })),
    setups: [
      {
        id: 1,
        frequencies: Float64Array.from({ length: subbands * channels }, (_, i) => 1e9 + 1e6 * i),
        channelWidths: new Float64Array(subbands).fill(1e6),
      },
    ],
    polarizations,
    shape,
    unit: "Jy",
    hasWeights: true,
    rows: rows.length,
    notes: [],
    blocks: (request) => blocksOf(rows, shape, samples, request),
    ...data.dataset,
  };
}

interface Samples {
  readonly real: Float32Array;
  readonly imag: Float32Array;
  readonly weight: Float32Array;
}

function fillSamples({ rows, sample = () => [1, 0, 1] }: MemoryData, shape: Shape): Samples {
  const { subbands, channels, polarizations } = shape;
  const size = rows.length * subbands * channels * polarizations;
  const samples = {
    real: new Float32Array(size),
    imag: new Float32Array(size),
    weight: new Float32Array(size),
  };
  let i = 0;
  for (let row = 0; row < rows.length; row++) {
    for (let s = 0; s < subbands; s++) {
      for (let c = 0; c < channels; c++) {
        for (let p = 0; p < polarizations; p++, i++) {
          const [re, im, weight] = sample(row, s, c, p);
          samples.real[i] = re;
          samples.imag[i] = im;
          samples.weight[i] = weight;
        }
      }
    }
  }
  return samples;
}

async function* blocksOf(
  rows: readonly MemoryRow[],
  shape: Shape,
  samples: Samples,
  request: BlockRequest,
): AsyncIterable<SampleBlock> {
  const [first, last] = request.rows ?? [0, rows.length];
  const step = request.blockRows ?? 1000;
  for (let from = first; from < last; from += step) {
    yield blockOf(rows, shape, samples, from, Math.min(last, from + step), request.want);
  }
}

function blockOf(
  all: readonly MemoryRow[],
  shape: Shape,
  samples: Samples,
  from: number,
  to: number,
  want: BlockRequest["want"],
): SampleBlock {
  const rows = all.slice(from, to);
  const size = shape.subbands * shape.channels * shape.polarizations;
  const part = (values: Float32Array, wanted: boolean) =>
    wanted ? values.slice(from * size, to * size) : new Float32Array(0);
  return {
    firstRow: from,
    rows: rows.length,
    time: Float64Array.from(rows, (row) => row.time),
    u: Float64Array.from(rows, (row) => row.u ?? 0),
    v: Float64Array.from(rows, (row) => row.v ?? 0),
    w: Float64Array.from(rows, (row) => row.w ?? 0),
    antenna1: Int32Array.from(rows, (row) => row.antenna1),
    antenna2: Int32Array.from(rows, (row) => row.antenna2),
    subarray: Int32Array.from(rows, (row) => row.subarray ?? 1),
    field: Int32Array.from(rows, (row) => row.field ?? 1),
    setup: Int32Array.from(rows, (row) => row.setup ?? 0),
    integration: Float32Array.from(rows, (row) => row.integration ?? 10),
    real: part(samples.real, want === "samples"),
    imag: part(samples.imag, want === "samples"),
    weight: part(samples.weight, want !== "rows"),
  };
}
