/**
 * One row at a time, from sky to samples: model, air, gains, the faults' factors, noise, and what faults do to the
 * result. A row depends on the scenario, its integration and its baseline alone.
 */

import type { Vector3 } from "../geometry/earth.ts";
import { applyMatrix, fillUvwMatrix } from "../geometry/uvw.ts";
import { SPEED_OF_LIGHT } from "../util/constants.ts";
import type { CompiledFault, Effect, RowState, Stage } from "./faults/effect.ts";
import { FeedModel } from "./feeds.ts";
import type { GainTable } from "./gains.ts";
import type { Instrument } from "./instrument.ts";
import type { Observation } from "./observation.ts";
import { Random } from "./random.ts";
import { Sky } from "./sky.ts";
import { STREAM } from "./streams.ts";

/** Half the sum or difference of two products has 1/sqrt 2 of their noise. */
const STOKES_NOISE = Math.SQRT1_2;

export class RowMaker {
  readonly row: RowState;
  private readonly observation: Observation;
  private readonly effects: readonly Effect[];
  private readonly sky: Sky;
  private readonly feeds: FeedModel;
  private readonly gains: GainTable | null;
  private readonly air: Float64Array | null;
  private readonly random = new Random();
  private readonly normals: Float64Array;
  private readonly matrix = new Float64Array(9);
  private matrixTime = -1;

  constructor(observation: Observation, instrument: Instrument, faults: readonly CompiledFault[]) {
    this.observation = observation;
    this.effects = faults.flatMap(({ effect }) => (effect === null ? [] : [effect]));
    this.sky = new Sky(observation);
    this.feeds = new FeedModel(observation, instrument.leakage, this.sky);
    this.gains = instrument.gains;
    this.air = instrument.air;
    this.normals = new Float64Array(2 * observation.rowSamples);
    this.row = emptyRow(observation.rowSamples);
  }

  /** Work out u, v, w and the antenna numbers of a row. */
  begin(time: number, baseline: number): void {
    const { row, observation, matrix } = this;
    const station1 = observation.first[baseline]!;
    const station2 = observation.second[baseline]!;
    row.time = time;
    row.baseline = baseline;
    row.station1 = station1;
    row.station2 = station2;
    const a = observation.stations[station1]!;
    const b = observation.stations[station2]!;
    row.antenna1 = a.number;
    row.antenna2 = b.number;
    if (time !== this.matrixTime) {
      const { declination } = observation.fields[observation.fieldAt[time]!]!;
      fillUvwMatrix(observation.hourAngleAt[time]!, declination, matrix);
      this.matrixTime = time;
    }
    const [u, v, w] = applyMatrix(matrix, seconds(a.actual, b.actual));
    row.actual.u = u;
    row.actual.v = v;
    row.actual.w = w;
    const written = applyMatrix(matrix, seconds(a.forUvw, b.forUvw));
    row.u = written[0];
    row.v = written[1];
    row.w = written[2];
    row.actual.untracked = w - applyMatrix(matrix, seconds(a.tracked, b.tracked))[2];
    this.run("header");
  }

  /** Weights of the row begun. */
  weigh(): void {
    this.fillSigma();
    const { weight, sigma } = this.row;
    const { weights } = this.observation.scenario;
    if (weights === "unity") weight.fill(1);
    else for (let i = 0; i < weight.length; i++) weight[i] = weights / (sigma[i]! * sigma[i]!);
    this.run("weight");
  }

  /** Samples of the row begun; `weigh` comes first. */
  sample(): void {
    const { row, observation } = this;
    row.exchanged1 = false;
    row.exchanged2 = false;
    this.run("hands");
    this.sky.fill(row.time, row.actual);
    this.bend();
    this.fillSignal();
    this.run("signal");
    const { noise, sigma, valueRe, valueIm, signalRe, signalIm } = row;
    const scale = observation.scenario.noise;
    for (let i = 0; i < noise.length; i++) noise[i] = sigma[i]! * scale;
    this.run("noise");
    if (scale === 0) {
      valueRe.set(signalRe);
      valueIm.set(signalIm);
    } else {
      const { normals, random } = this;
      random.restart(observation.scenario.seed, STREAM.noise, row.time, row.baseline);
      random.fillNormals(normals, normals.length);
      for (let i = 0; i < noise.length; i++) {
        valueRe[i] = signalRe[i]! + noise[i]! * normals[2 * i]!;
        valueIm[i] = signalIm[i]! + noise[i]! * normals[2 * i + 1]!;
      }
      if (row.station1 === row.station2) this.keepReal();
    }
    this.run("value");
  }

  private run(stage: Stage): void {
    const { row } = this;
    for (const effect of this.effects) {
      const change = effect.stages[stage];
      if (change !== undefined && effect.covers(row.time, row.baseline)) change(row);
    }
  }

  /** Turn the model by the two antennas' difference of delay in the air. */
  private bend(): void {
    if (this.air === null) return;
    const { observation, row, sky } = this;
    const { channels, setup, channelStep, shape } = observation;
    const at = row.time * observation.stations.length;
    const delay = this.air[at + row.station1]! - this.air[at + row.station2]!;
    const stepRe = Math.cos(2 * Math.PI * channelStep * delay);
    const stepIm = Math.sin(2 * Math.PI * channelStep * delay);
    const layers = sky.polarized ? 4 : 1;
    for (let start = 0; start < channels; start += shape.channels) {
      const phase = 2 * Math.PI * setup.frequencies[start]! * delay;
      let re = Math.cos(phase);
      let im = Math.sin(phase);
      for (let c = start; c < start + shape.channels; c++) {
        for (let i = c; i < layers * channels; i += channels) {
          const x = sky.real[i]!;
          const y = sky.imag[i]!;
          sky.real[i] = x * re - y * im;
          sky.imag[i] = x * im + y * re;
        }
        const turned = re * stepRe - im * stepIm;
        im = re * stepIm + im * stepRe;
        re = turned;
      }
    }
  }

  private fillSignal(): void {
    const { observation, row, feeds, gains } = this;
    const { products, channels } = observation;
    const { signalRe, signalIm } = row;
    const count = products.length;
    for (let p = 0; p < count; p++) {
      const { hand1, hand2 } = products[p]!;
      const model = feeds.product(products[p]!, row);
      const { real, imag, at } = model;
      if (gains === null) {
        for (let c = 0, i = p; c < channels; c++, i += count) {
          signalRe[i] = real[at + c]!;
          signalIm[i] = imag[at + c]!;
        }
        continue;
      }
      const g1 = (row.station1 * 2 + hand1) * channels;
      const g2 = (row.station2 * 2 + hand2) * channels;
      for (let c = 0, i = p; c < channels; c++, i += count) {
        const ar = gains.real[g1 + c]!;
        const ai = gains.imag[g1 + c]!;
        const br = gains.real[g2 + c]!;
        const bi = gains.imag[g2 + c]!;
        const gr = ar * br + ai * bi;
        const gi = ai * br - ar * bi;
        const x = real[at + c]!;
        const y = imag[at + c]!;
        signalRe[i] = x * gr - y * gi;
        signalIm[i] = x * gi + y * gr;
      }
    }
  }

  /** sqrt(SEFD1 SEFD2)/(eta sqrt(2 dnu tau)) and the gains (Thompson, Moran & Swenson 2017, section 6.2). */
  private fillSigma(): void {
    const { observation, row, gains } = this;
    const { scenario, stations, products, channels, setup, integration } = observation;
    const { sigma } = row;
    const sefd = Math.sqrt(stations[row.station1]!.sefd * stations[row.station2]!.sefd);
    // An autocorrelation is real: all its noise is in the one part.
    const parts = row.station1 === row.station2 ? 1 : 2;
    const spread = Math.sqrt(parts * setup.channelWidths[0]! * integration);
    const level = sefd / (scenario.array.efficiency * spread);
    const count = products.length;
    for (let p = 0; p < count; p++) {
      const { hand1, hand2, stokes } = products[p]!;
      const own = stokes === null ? level : level * STOKES_NOISE;
      const g1 = (row.station1 * 2 + hand1) * channels;
      const g2 = (row.station2 * 2 + hand2) * channels;
      for (let c = 0, i = p; c < channels; c++, i += count) {
        sigma[i] = gains === null ? own : own * gains.size[g1 + c]! * gains.size[g2 + c]!;
      }
    }
  }

  /** An antenna with itself: parallel hands are real. */
  private keepReal(): void {
    const { products, channels } = this.observation;
    for (let p = 0; p < products.length; p++) {
      const { hand1, hand2 } = products[p]!;
      if (hand1 !== hand2) continue;
      for (let c = 0, i = p; c < channels; c++, i += products.length) this.row.valueIm[i] = 0;
    }
  }
}

/** a - b as light travels it. */
function seconds(a: Vector3, b: Vector3): Vector3 {
  return [(a[0] - b[0]) / SPEED_OF_LIGHT, (a[1] - b[1]) / SPEED_OF_LIGHT, (a[2] - b[2]) / SPEED_OF_LIGHT];
}

function emptyRow(samples: number): RowState {
  const array = () => new Float64Array(samples);
  return {
    time: 0,
    baseline: 0,
    station1: 0,
    station2: 0,
    exchanged1: false,
    exchanged2: false,
    signalRe: array(),
    signalIm: array(),
    sigma: array(),
    noise: array(),
    valueRe: array(),
    valueIm: array(),
    weight: array(),
    u: 0,
    v: 0,
    w: 0,
    actual: { u: 0, v: 0, w: 0, untracked: 0 },
    antenna1: 0,
    antenna2: 0,
  };
}
