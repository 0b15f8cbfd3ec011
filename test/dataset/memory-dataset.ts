/** A small dataset held in memory, for tests that need blocks but no file. */
import type { BlockRequest, Dataset, Polarization, SampleBlock } from "../../src/dataset/dataset.ts";

export interface MemoryRow {
  readonly time: number;
  readonly antenna1: number;
  readonly antenna2: number;
  readonly field?: number;
  /** (subbands x channels x polarizations) */
  readonly weight: readonly number[];
}

export interface MemoryShape {
  readonly subbands: number;
  readonly channels: number;
  readonly polarizations: readonly Polarization[];
}

export function memoryDataset(shape: MemoryShape, rows: readonly MemoryRow[], blockRows = 3): Dataset {
  const { subbands, channels, polarizations } = shape;
  const numbers = [...new Set(rows.flatMap((row) => [row.antenna1, row.antenna2]))].sort((a, b) => a - b);
  const fields = [...new Set(rows.map((row) => row.field ?? 1))].sort((a, b) => a - b);
  return {
    name: "in-memory",
    files: [],
    bytes: 0,
    format: "simulated",
    header: {},
    array: {
      name: "invented",
      frame: "unknown",
      antennas: numbers.map((number) => ({ number, name: `N${number}`, position: null, diameter: null })),
      fromTable: true,
      siderealTimeAtReference: null,
      degreesPerDay: 360.9856,
      referenceDay: null,
      ut1MinusUtc: 0,
      timeSystem: "UTC",
    },
    fields: fields.map((id) => ({
      id,
      name: `field ${id}`,
      rightAscension: 0,
      declination: 0,
      equinox: 2000,
    })),
    setups: [
      {
        id: 1,
        frequencies: new Float64Array(subbands * channels).fill(1e9),
        channelWidths: new Float64Array(subbands).fill(1e6),
      },
    ],
    polarizations,
    shape: { subbands, channels, polarizations: polarizations.length },
    unit: "Jy",
    hasWeights: true,
    rows: rows.length,
    notes: [],
    blocks: (request) => blocksOf(shape, rows, { blockRows, ...request }),
  };
}

async function* blocksOf(
  shape: MemoryShape,
  rows: readonly MemoryRow[],
  request: BlockRequest,
): AsyncIterable<SampleBlock> {
  const size = shape.subbands * shape.channels * shape.polarizations.length;
  const [first, last] = request.rows ?? [0, rows.length];
  const step = request.blockRows ?? 3;
  for (let from = first; from < last; from += step) {
    const some = rows.slice(from, Math.min(last, from + step));
    const samples = request.want === "samples" ? some.length * size : 0;
    yield {
      firstRow: from,
      rows: some.length,
      time: Float64Array.from(some, (row) => row.time),
      u: new Float64Array(some.length),
      v: new Float64Array(some.length),
      w: new Float64Array(some.length),
      antenna1: Int32Array.from(some, (row) => row.antenna1),
      antenna2: Int32Array.from(some, (row) => row.antenna2),
      subarray: new Int32Array(some.length).fill(1),
      field: Int32Array.from(some, (row) => row.field ?? 1),
      setup: new Int32Array(some.length),
      integration: new Float32Array(some.length).fill(10),
      real: new Float32Array(samples),
      imag: new Float32Array(samples),
      weight:
        request.want === "rows" ? new Float32Array(0) : Float32Array.from(some.flatMap((row) => row.weight)),
    };
  }
}

/** Every weight of a dataset, in file order. */
export async function weightsOf(dataset: Dataset): Promise<number[]> {
  const { subbands, channels, polarizations } = dataset.shape;
  const size = subbands * channels * polarizations;
  const weights: number[] = [];
  for await (const block of dataset.blocks({ want: "weights" })) {
    weights.push(...block.weight.subarray(0, block.rows * size));
  }
  return weights;
}
