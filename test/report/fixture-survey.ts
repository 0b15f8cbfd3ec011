/**
 * The survey of an invented array of 14 antennas on three arms: two hours on a double source at L band, an antenna
 * that jumps in phase, one that is silent, interference in five channels, and a quarter of an hour flagged already.
 */

import type { Antenna, Dataset } from "../../src/dataset/dataset.ts";
import { enuToLocal } from "../../src/geometry/earth.ts";
import { uvwOf } from "../../src/geometry/uvw.ts";
import type { Baseline, Levels, Survey, Tracks } from "../../src/measure/survey-result.ts";
import { SPEED_OF_LIGHT } from "../../src/util/constants.ts";

/** 2032-03-14T21:00:00 UTC */
export const START = 63305.875;
export const INTEGRATION = 60;
export const INTEGRATIONS = 120;
export const JUMP = { antenna: 7, from: START + 45.5 / 1440, to: START + 72.5 / 1440, degrees: 42 };
export const SILENT = 11;
export const INTERFERENCE = { subband: 1, channels: [20, 24] as const };

const LATITUDE = -0.51;
const DECLINATION = -0.72;
const SUBBANDS = 2;
const CHANNELS = 32;
const POLARIZATIONS = 2;

/** Numbers in [0, 1) that are the same every time. */
export function seeded(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state / 2 ** 32;
  };
}

function antennas(): Antenna[] {
  return Array.from({ length: 14 }, (_, i) => {
    const arm = i % 3;
    const radius = 60 * 1.38 ** i;
    const angle = (arm * 2 * Math.PI) / 3 + 0.13 * i;
    const position = enuToLocal([radius * Math.sin(angle), radius * Math.cos(angle), 2 * (i % 4)], LATITUDE);
    return { number: i + 1, name: `Q${String(i + 1).padStart(2, "0")}`, position, diameter: 13.5 };
  });
}

export function fixtureDataset(): Dataset {
  const frequencies = Float64Array.from({ length: SUBBANDS * CHANNELS }, (_, i) => 1.29e9 + i * 2e6);
  return {
    name: "quillon-night12",
    files: ["quillon-night12.uvfits"],
    bytes: 91_238_400,
    format: "random-groups",
    header: { TELESCOP: "QUILLON", OBSERVER: "R. Ashdown", "DATE-OBS": "2032-03-14" },
    array: {
      name: "Quillon",
      frame: "local",
      antennas: antennas(),
      fromTable: true,
      siderealTimeAtReference: 172.4,
      degreesPerDay: 360.9856,
      referenceDay: 63305,
      ut1MinusUtc: 0,
      timeSystem: "UTC",
    },
    fields: [{ id: 1, name: "J0412-4117", rightAscension: 1.1, declination: DECLINATION, equinox: 2000 }],
    setups: [{ id: 1, frequencies, channelWidths: new Float64Array(SUBBANDS).fill(2e6) }],
    polarizations: ["RR", "LL"],
    shape: { subbands: SUBBANDS, channels: CHANNELS, polarizations: POLARIZATIONS },
    unit: "Jy",
    hasWeights: true,
    rows: 91 * INTEGRATIONS,
    notes: [
      {
        kind: "note",
        code: "local-positions",
        text: "Antenna positions are local; the longitude of the array is not in the file.",
      },
      { kind: "fault", code: "future-date", text: "The observation is dated after the file was written." },
    ],
    blocks: () => {
      throw new Error("a report reads no samples");
    },
  };
}

function baselinesOf(dataset: Dataset): Baseline[] {
  const numbers = dataset.array.antennas.map((antenna) => antenna.number);
  return numbers.flatMap((a, i) => numbers.slice(i + 1).map((b) => ({ antenna1: a, antenna2: b })));
}

/** A double of 1.4 and 0.5 Jy, 40 arcsec apart, with a faint halo that short spacings see. */
function sky(u: number, v: number): [number, number] {
  const spacing = Math.hypot(u, v);
  const turn = -2 * Math.PI * (u * 1.6e-4 + v * 1.1e-4);
  const halo = 1.1 * Math.exp(-((spacing / 900) ** 2));
  return [1.4 + halo + 0.5 * Math.cos(turn), 0.5 * Math.sin(turn)];
}

function tracksOf(dataset: Dataset, baselines: readonly Baseline[]): Tracks {
  const cells = baselines.length * INTEGRATIONS;
  const products = SUBBANDS * POLARIZATIONS;
  const random = seeded(12);
  const noise = (sigma: number) =>
    sigma * Math.sqrt(-2 * Math.log(1 - random())) * Math.cos(2 * Math.PI * random());
  const tracks = {
    cells,
    binSeconds: 0,
    baseline: new Int32Array(cells),
    firstCell: Int32Array.from({ length: baselines.length + 1 }, (_, b) => b * INTEGRATIONS),
    time: new Float64Array(cells),
    u: new Float64Array(cells),
    v: new Float64Array(cells),
    w: new Float64Array(cells),
    field: new Int32Array(cells).fill(1),
    setup: new Int32Array(cells),
    scan: new Int32Array(cells),
    subarray: new Int32Array(cells).fill(1),
    integration: new Float32Array(cells).fill(INTEGRATION),
    real: new Float32Array(cells * products),
    imag: new Float32Array(cells * products),
    amplitude: new Float32Array(cells * products),
    weight: new Float32Array(cells * products),
    slopeReal: new Float32Array(cells * products),
    slopeImag: new Float32Array(cells * products),
    usable: new Uint32Array(cells * products),
    flagged: new Uint32Array(cells * products),
    bad: new Uint32Array(cells * products),
    zero: new Uint32Array(cells * products),
  };
  const positions = new Map(dataset.array.antennas.map((antenna) => [antenna.number, antenna.position!]));
  let cell = 0;
  for (const [b, { antenna1, antenna2 }] of baselines.entries()) {
    const [p, q] = [positions.get(antenna1)!, positions.get(antenna2)!];
    for (let t = 0; t < INTEGRATIONS; t++, cell++) {
      const time = START + ((t + 0.5) * INTEGRATION) / 86400;
      const uvw = uvwOf(
        [p[0] - q[0], p[1] - q[1], p[2] - q[2]],
        -0.4 + t * INTEGRATION * 7.292e-5,
        DECLINATION,
      );
      tracks.baseline[cell] = b;
      tracks.time[cell] = time;
      tracks.u[cell] = uvw[0] / SPEED_OF_LIGHT;
      tracks.v[cell] = uvw[1] / SPEED_OF_LIGHT;
      tracks.w[cell] = uvw[2] / SPEED_OF_LIGHT;
      const jumps = time > JUMP.from && time < JUMP.to;
      const sign = antenna1 === JUMP.antenna ? 1 : antenna2 === JUMP.antenna ? -1 : 0;
      const turn = jumps ? (sign * JUMP.degrees * Math.PI) / 180 : 0;
      const silent = antenna1 === SILENT || antenna2 === SILENT;
      for (let product = 0; product < products; product++) {
        const at = cell * products + product;
        const frequency = product < POLARIZATIONS ? 1.32e9 : 1.385e9;
        const [re, im] = sky(tracks.u[cell]! * frequency, tracks.v[cell]! * frequency);
        const gain = silent ? 0 : 1;
        const wander = 0.12 * Math.sin(t / 17 + antenna1) - 0.12 * Math.sin(t / 17 + antenna2);
        const phase = turn + wander;
        tracks.real[at] = gain * (re * Math.cos(phase) - im * Math.sin(phase)) + noise(0.05);
        tracks.imag[at] = gain * (re * Math.sin(phase) + im * Math.cos(phase)) + noise(0.05);
        tracks.amplitude[at] =
          Math.hypot(tracks.real[at]!, tracks.imag[at]!) + (product >= 2 && t % 9 === 0 ? 0.6 : 0);
        tracks.weight[at] = CHANNELS * 12;
        const early = t < 15;
        tracks.flagged[at] = early ? CHANNELS : 1;
        tracks.bad[at] = !early && antenna1 === 3 ? 1 : 0;
        tracks.usable[at] = CHANNELS - tracks.flagged[at]! - tracks.bad[at]!;
        if (early) {
          tracks.real[at] = Number.NaN;
          tracks.imag[at] = Number.NaN;
          tracks.amplitude[at] = Number.NaN;
          tracks.weight[at] = 0;
        }
      }
    }
  }
  return tracks;
}

function levelsOf(baselines: readonly Baseline[]): Levels {
  const size = baselines.length * SUBBANDS * CHANNELS * POLARIZATIONS;
  const count = new Uint32Array(size);
  for (let i = 0; i < size; i++) {
    const channel = Math.floor(i / POLARIZATIONS) % CHANNELS;
    const edge = channel === 0 || channel === CHANNELS - 1;
    count[i] = edge ? 0 : INTEGRATIONS - 15;
  }
  const median = Float32Array.from({ length: size }, (_, i) => {
    const channel = Math.floor(i / POLARIZATIONS) % (SUBBANDS * CHANNELS);
    const inLine =
      channel >= CHANNELS + INTERFERENCE.channels[0] && channel <= CHANNELS + INTERFERENCE.channels[1];
    return (1.5 + 0.1 * Math.sin(channel / 9)) * (inLine ? 3.2 : 1);
  });
  return { median, sigma: new Float32Array(size).fill(0.29), count };
}

export function fixtureSurvey(dataset: Dataset): Survey {
  const baselines = baselinesOf(dataset);
  const tracks = tracksOf(dataset, baselines);
  const sum = (counts: Uint32Array) => counts.reduce((total, count) => total + count, 0);
  const times = Float64Array.from(
    { length: INTEGRATIONS },
    (_, t) => START + ((t + 0.5) * INTEGRATION) / 86400,
  );
  return {
    dataset,
    baselines,
    antennasWithData: dataset.array.antennas.map((antenna) => antenna.number),
    tracks,
    levels: levelsOf(baselines),
    times,
    integration: INTEGRATION,
    scans: [{ start: times[0]!, end: times[INTEGRATIONS - 1]!, field: 1 }],
    totals: {
      rows: tracks.cells,
      autocorrelationRows: 0,
      samples: tracks.cells * SUBBANDS * CHANNELS * POLARIZATIONS,
      usable: sum(tracks.usable),
      flagged: sum(tracks.flagged),
      bad: sum(tracks.bad),
      zero: 0,
      duplicateRows: 0,
      outOfOrderRows: 2,
      badTimeRows: 0,
      badUvwRows: 0,
    },
    measures: new Map(),
  };
}
