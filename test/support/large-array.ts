/**
 * Arrays of hundreds and thousands of antennas, made row by row in no memory to speak of: a point source at the phase
 * centre with a little noise, antennas on a spiral, the sky turning by 15 arcseconds a second.
 */
import type { Dataset, SampleBlock } from "../../src/dataset/dataset.ts";
import { newBlock } from "../../src/dataset/new-block.ts";

export interface LargeArray {
  readonly antennas: number;
  readonly integrations: number;
  readonly channels: number;
  /** antennas without fringes */
  readonly silent?: readonly number[];
}

const START = 60_000.5;
const INTEGRATION = 10;
const LIGHT = 299_792_458;
const SHAPE = { subbands: 1, polarizations: 1 };

/** Rows by integration, then antenna 1, then antenna 2; S/N 3 a sample. */
export function largeArray({ antennas, integrations, channels, silent = [] }: LargeArray): Dataset {
  const places = Array.from({ length: antennas }, (_, a): [number, number] => {
    const radius = 30 + (3000 * (a + 1)) / antennas;
    return [radius * Math.cos(2.399963 * a), radius * Math.sin(2.399963 * a)];
  });
  const baselines = (antennas * (antennas - 1)) / 2;
  // First row of each antenna 1 within an integration.
  const starts = Float64Array.from(places, (_, a) => a * antennas - (a * (a + 1)) / 2);
  const dark = new Set(silent.map((number) => number - 1));
  const shape = { ...SHAPE, channels };
  const fillRow = (block: SampleBlock, k: number, row: number): void => {
    const time = Math.floor(row / baselines);
    const within = row - time * baselines;
    let a = Math.min(
      antennas - 2,
      Math.floor(antennas - 0.5 - Math.sqrt((antennas - 0.5) ** 2 - 2 * within)),
    );
    while (starts[a + 1]! <= within) a += 1;
    while (starts[a]! > within) a -= 1;
    const b = a + 1 + within - starts[a]!;
    const turn = 0.3 + (time * INTEGRATION * 2 * Math.PI) / 86_164;
    const x = places[a]![0] - places[b]![0];
    const y = places[a]![1] - places[b]![1];
    block.time[k] = START + (time * INTEGRATION) / 86_400;
    block.u[k] = (x * Math.cos(turn) - y * Math.sin(turn)) / LIGHT;
    block.v[k] = (0.8 * (x * Math.sin(turn) + y * Math.cos(turn))) / LIGHT;
    block.w[k] = (0.6 * (x * Math.sin(turn) + y * Math.cos(turn))) / LIGHT;
    block.antenna1[k] = a + 1;
    block.antenna2[k] = b + 1;
    block.subarray[k] = 1;
    block.field[k] = 1;
    block.setup[k] = 0;
    block.integration[k] = INTEGRATION;
    if (block.weight.length === 0) return;
    const signal = dark.has(a) || dark.has(b) ? 0 : 3;
    for (let c = 0; c < channels; c++) {
      const at = k * channels + c;
      block.weight[at] = 1;
      if (block.real.length === 0) continue;
      block.real[at] = signal + noise(2 * (row * channels + c));
      block.imag[at] = noise(2 * (row * channels + c) + 1);
    }
  };
  return {
    name: `array of ${antennas}`,
    files: [],
    bytes: 0,
    format: "simulated",
    header: {},
    array: {
      name: "Wide Meadow Array",
      frame: "local",
      antennas: places.map(([x, y], a) => ({
        number: a + 1,
        name: `M${a + 1}`,
        position: [0, x, y],
        diameter: 12,
      })),
      fromTable: true,
      siderealTimeAtReference: null,
      degreesPerDay: 360.98564736629,
      referenceDay: null,
      ut1MinusUtc: 0,
      timeSystem: "UTC",
    },
    fields: [{ id: 1, name: "Heron", rightAscension: 1, declination: -0.5, equinox: 2000 }],
    setups: [
      {
        id: 1,
        frequencies: Float64Array.from({ length: channels }, (_, c) => 1.4e9 + 1e6 * c),
        channelWidths: Float64Array.of(1e6),
      },
    ],
    polarizations: ["I"],
    shape,
    unit: "Jy",
    hasWeights: true,
    rows: baselines * integrations,
    notes: [],
    async *blocks(request) {
      const [first, last] = request.rows ?? [0, baselines * integrations];
      const most = Math.min(request.blockRows ?? 8192, 65_536, last - first);
      const block = newBlock(most, shape, request.want);
      for (let row = first; row < last; row += most) {
        block.firstRow = row;
        block.rows = Math.min(most, last - row);
        for (let k = 0; k < block.rows; k++) fillRow(block, k, row + k);
        yield block;
      }
    },
  };
}

/** Nearly normal, of the index alone: the sum of three uniform numbers of a hash. */
function noise(index: number): number {
  let sum = 0;
  for (let part = 1; part <= 3; part++) {
    let h = Math.imul((index + part * 0x9e3779b9) | 0, 0x85ebca6b);
    h = Math.imul(h ^ (h >>> 13), 0xc2b2ae35);
    h ^= h >>> 16;
    sum += (h >>> 0) / 2 ** 32 - 0.5;
  }
  return 2 * sum;
}
