/**
 * An invented array that observes one field: a dataset in memory and the survey of it, for tests that need (u, v, w)
 * that behave. The geometry here is written out on its own and shares nothing with what is tested.
 */
import type { Dataset, Polarization, SampleBlock } from "../../src/dataset/dataset.ts";
import type { Baseline, Survey } from "../../src/measure/survey-result.ts";

export interface ArrayOptions {
  /** east, north, up of each antenna, metres; numbers count from 1 */
  readonly antennas: readonly (readonly [number, number, number])[];
  /** degrees */
  readonly latitude?: number;
  readonly declination?: number;
  readonly rightAscension?: number;
  /** hours: first and last local hour angle, and integrations between */
  readonly hours?: readonly [number, number];
  readonly integrations?: number;
  /** seconds */
  readonly integrationTime?: number;
  /** Hz */
  readonly frequency?: number;
  readonly channelWidth?: number;
  readonly channels?: number;
  readonly subbands?: number;
  readonly polarizations?: readonly Polarization[];
  readonly diameter?: number | null;
  /** Jy, noise of each sample */
  readonly sigma?: number;
  readonly amplitude?: number;
  /** weight of a sample; default 1 / sigma^2 */
  readonly weight?: (row: RowPlace, subband: number, channel: number, product: number) => number;
  /** changes the u, v, w (seconds) that the file says */
  readonly uvw?: (uvw: [number, number, number], row: RowPlace) => [number, number, number];
  readonly blockRows?: number;
}

export interface RowPlace {
  readonly antenna1: number;
  readonly antenna2: number;
  readonly integration: number;
  /** radians */
  readonly hourAngle: number;
}

const C = 299792458;
const RAD = Math.PI / 180;

/** x to the local meridian on the equator, y east, z to the pole. */
export function localPosition([east, north, up]: readonly [number, number, number], latitude: number) {
  const f = latitude * RAD;
  return [-Math.sin(f) * north + Math.cos(f) * up, east, Math.cos(f) * north + Math.sin(f) * up] as const;
}

/** Metres. */
export function projected(
  [x, y, z]: readonly [number, number, number],
  hour: number,
  declination: number,
): [number, number, number] {
  const [sh, ch] = [Math.sin(hour), Math.cos(hour)];
  const [sd, cd] = [Math.sin(declination), Math.cos(declination)];
  return [sh * x + ch * y, -sd * ch * x + sd * sh * y + cd * z, cd * ch * x - cd * sh * y + sd * z];
}

export interface Observed {
  readonly dataset: Dataset;
  readonly survey: Survey;
  /** Hz, subbands x channels */
  readonly frequencies: Float64Array;
  /** every row's u, v, w in seconds as the file has it */
  readonly rows: readonly (RowPlace & { readonly u: number; readonly v: number; readonly w: number })[];
}

export function observedArray(options: ArrayOptions): Observed {
  const settings = {
    latitude: 34,
    declination: 40,
    rightAscension: 80,
    hours: [-3, 3] as const,
    integrations: 40,
    integrationTime: 10,
    frequency: 1.4e9,
    channelWidth: 1e6,
    channels: 4,
    subbands: 1,
    polarizations: ["XX", "YY"] as const,
    diameter: 25,
    sigma: 0.5,
    amplitude: 1,
    blockRows: 64,
    ...options,
  };
  const frequencies = Float64Array.from(
    { length: settings.subbands * settings.channels },
    (_, c) => settings.frequency + c * settings.channelWidth,
  );
  const positions = settings.antennas.map((enu) => localPosition(enu, settings.latitude));
  const declination = settings.declination * RAD;
  const rows: Observed["rows"][number][] = [];
  for (let t = 0; t < settings.integrations; t++) {
    const share = settings.integrations === 1 ? 0.5 : t / (settings.integrations - 1);
    const hourAngle = (settings.hours[0] + share * (settings.hours[1] - settings.hours[0])) * 15 * RAD;
    for (let i = 0; i < positions.length; i++) {
      for (let j = i + 1; j < positions.length; j++) {
        const [p, q] = [positions[i]!, positions[j]!];
        const metres = projected([p[0] - q[0], p[1] - q[1], p[2] - q[2]], hourAngle, declination);
        const place = { antenna1: i + 1, antenna2: j + 1, integration: t, hourAngle };
        const seconds = metres.map((value) => value / C) as [number, number, number];
        const [u, v, w] = settings.uvw?.(seconds, place) ?? seconds;
        rows.push({ ...place, u, v, w });
      }
    }
  }
  const weightOf = settings.weight ?? (() => 1 / settings.sigma ** 2);
  // Greenwich is at the array's meridian here: the hour angle follows from the sidereal time alone.
  const timeOf = (place: RowPlace) =>
    59000 + (place.hourAngle / RAD + settings.rightAscension) / 360.98564736629;
  const { subbands, channels, polarizations } = settings;
  const size = subbands * channels * polarizations.length;
  const weights = Float32Array.from({ length: rows.length * size }, (_, at) => {
    const row = rows[Math.floor(at / size)]!;
    const product = at % polarizations.length;
    const channel = Math.floor(at / polarizations.length) % channels;
    const subband = Math.floor(at / polarizations.length / channels) % subbands;
    return weightOf(row, subband, channel, product);
  });
  const dataset: Dataset = {
    name: "observed-array",
    files: [],
    bytes: 0,
    format: "simulated",
    header: {},
    array: {
      name: "invented",
      frame: "local",
      antennas: positions.map((position, i) => ({
        number: i + 1,
        name: `N${i + 1}`,
        position,
        diameter: settings.diameter,
      })),
      fromTable: true,
      siderealTimeAtReference: 0,
      degreesPerDay: 360.98564736629,
      referenceDay: 59000,
      ut1MinusUtc: 0,
      timeSystem: "UTC",
    },
    fields: [
      { id: 1, name: "field", rightAscension: settings.rightAscension * RAD, declination, equinox: 2000 },
    ],
    setups: [{ id: 1, frequencies, channelWidths: new Float64Array(subbands).fill(settings.channelWidth) }],
    polarizations,
    shape: { subbands, channels, polarizations: polarizations.length },
    unit: "Jy",
    hasWeights: true,
    rows: rows.length,
    notes: [],
    blocks: async function* ({ want, rows: range, blockRows }): AsyncIterable<SampleBlock> {
      const step = blockRows ?? settings.blockRows;
      const [first, last] = range ?? [0, rows.length];
      for (let from = first; from < last; from += step) {
        const some = rows.slice(from, Math.min(last, from + step));
        const samples = want === "samples" ? some.length * size : 0;
        yield {
          firstRow: from,
          rows: some.length,
          time: Float64Array.from(some, timeOf),
          u: Float64Array.from(some, (row) => row.u),
          v: Float64Array.from(some, (row) => row.v),
          w: Float64Array.from(some, (row) => row.w),
          antenna1: Int32Array.from(some, (row) => row.antenna1),
          antenna2: Int32Array.from(some, (row) => row.antenna2),
          subarray: new Int32Array(some.length).fill(1),
          field: new Int32Array(some.length).fill(1),
          setup: new Int32Array(some.length),
          integration: new Float32Array(some.length).fill(settings.integrationTime),
          real: new Float32Array(samples).fill(settings.amplitude),
          imag: new Float32Array(samples),
          weight:
            want === "rows" ? new Float32Array(0) : weights.slice(from * size, (from + some.length) * size),
        };
      }
    },
  };
  return { dataset, survey: surveyOf(dataset, rows, weights, timeOf, settings), frequencies, rows };
}

function surveyOf(
  dataset: Dataset,
  rows: Observed["rows"],
  weights: Float32Array,
  timeOf: (place: RowPlace) => number,
  settings: { readonly sigma: number; readonly amplitude: number; readonly integrationTime: number },
): Survey {
  const { subbands, channels, polarizations } = dataset.shape;
  const size = subbands * channels * polarizations;
  const order = [...rows.keys()].sort(
    (a, b) => rows[a]!.antenna1 - rows[b]!.antenna1 || rows[a]!.antenna2 - rows[b]!.antenna2 || a - b,
  );
  const baselines: Baseline[] = [];
  const firstCell: number[] = [];
  const baseline = new Int32Array(order.length);
  order.forEach((row, cell) => {
    const { antenna1, antenna2 } = rows[row]!;
    const last = baselines.at(-1);
    if (last?.antenna1 !== antenna1 || last.antenna2 !== antenna2) {
      baselines.push({ antenna1, antenna2 });
      firstCell.push(cell);
    }
    baseline[cell] = baselines.length - 1;
  });
  firstCell.push(order.length);
  const products = order.length * subbands * polarizations;
  const weight = new Float32Array(products);
  const usable = new Uint32Array(products);
  const count = new Uint32Array(baselines.length * size);
  order.forEach((row, cell) => {
    for (let at = 0; at < size; at++) {
      const value = weights[row * size + at]!;
      if (!(value > 0)) continue;
      const product = Math.floor(at / polarizations / channels) * polarizations + (at % polarizations);
      weight[cell * subbands * polarizations + product]! += value;
      usable[cell * subbands * polarizations + product]! += 1;
      count[baseline[cell]! * size + at]! += 1;
    }
  });
  const pick = (key: "u" | "v" | "w") => Float64Array.from(order, (row) => rows[row]![key]);
  const times = [...new Set(rows.map(timeOf))].sort((a, b) => a - b);
  return {
    dataset,
    baselines,
    antennasWithData: dataset.array.antennas.map((antenna) => antenna.number),
    tracks: {
      cells: order.length,
      binSeconds: 0,
      baseline,
      firstCell: Int32Array.from(firstCell),
      time: Float64Array.from(order, (row) => timeOf(rows[row]!)),
      u: pick("u"),
      v: pick("v"),
      w: pick("w"),
      field: new Int32Array(order.length).fill(1),
      setup: new Int32Array(order.length),
      scan: new Int32Array(order.length),
      subarray: new Int32Array(order.length).fill(1),
      integration: new Float32Array(order.length).fill(settings.integrationTime),
      real: new Float32Array(products).fill(settings.amplitude),
      imag: new Float32Array(products),
      amplitude: new Float32Array(products).fill(settings.amplitude),
      weight,
      slopeReal: new Float32Array(products),
      slopeImag: new Float32Array(products),
      usable,
      flagged: new Uint32Array(products),
      bad: new Uint32Array(products),
      zero: new Uint32Array(products),
    },
    levels: {
      median: new Float32Array(count.length).fill(settings.amplitude),
      sigma: new Float32Array(count.length).fill(settings.sigma),
      count,
    },
    times: Float64Array.from(times),
    integration: settings.integrationTime,
    scans: [{ start: times[0]!, end: times.at(-1)!, field: 1 }],
    totals: {
      rows: rows.length,
      autocorrelationRows: 0,
      samples: rows.length * size,
      usable: usable.reduce((sum, value) => sum + value, 0),
      flagged: weights.reduce((sum, value) => sum + (value < 0 ? 1 : 0), 0),
      bad: 0,
      zero: 0,
      duplicateRows: 0,
      outOfOrderRows: 0,
      badTimeRows: 0,
      badUvwRows: 0,
    },
    measures: new Map(),
  };
}

/** A three-armed array, seven antennas an arm but for those left out, spacings growing outwards, metres. */
export function threeArms(reach: number, perArm: number, up = 0): [number, number, number][] {
  const antennas: [number, number, number][] = [];
  for (let arm = 0; arm < 3; arm++) {
    const azimuth = (arm * 120 + 5) * RAD;
    for (let k = 1; k <= perArm; k++) {
      const radius = reach * (k / perArm) ** 1.7;
      // Small heights off the plane that follow no pattern.
      const height = up * Math.sin(7 * (arm * perArm + k));
      antennas.push([radius * Math.sin(azimuth), radius * Math.cos(azimuth), height]);
    }
  }
  return antennas;
}
