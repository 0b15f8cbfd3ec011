/** Complex gains that every dataset has before calibration: amplitudes, constant phases, passbands, leakage. */
import type { Observation } from "./observation.ts";
import { Random } from "./random.ts";
import type { Gains } from "./scenario.ts";
import { STREAM } from "./streams.ts";

/** (antennas x 2 hands x channels) */
export interface GainTable {
  readonly real: Float64Array;
  readonly imag: Float64Array;
  readonly size: Float64Array;
}

/** Complex leakage into each hand from the other, (antennas x 2). */
export interface LeakageTable {
  readonly real: Float64Array;
  readonly imag: Float64Array;
}

/** null where every gain is 1 */
export function gainTable(observation: Observation): GainTable | null {
  const { scenario, stations, channels } = observation;
  const { gains } = scenario;
  if (gains.amplitude === 0 && gains.phase === 0 && gains.bandpass === undefined) return null;
  const length = stations.length * 2 * channels;
  const table = {
    real: new Float64Array(length),
    imag: new Float64Array(length),
    size: new Float64Array(length),
  };
  const random = new Random();
  for (let antenna = 0; antenna < stations.length; antenna++) {
    for (let hand = 0; hand < 2; hand++) {
      random.restart(scenario.seed, STREAM.gains, antenna, hand);
      fillHand(observation, gains, random, table, (antenna * 2 + hand) * channels);
    }
  }
  return table;
}

function fillHand(
  observation: Observation,
  gains: Gains,
  random: Random,
  table: GainTable,
  at: number,
): void {
  const { channels: perSubband, subbands } = observation.shape;
  const level = Math.exp(gains.amplitude * random.normal());
  const turn = gains.phase * random.normal();
  for (let subband = 0; subband < subbands; subband++) {
    const ripple = wave(random);
    const bend = wave(random);
    for (let channel = 0; channel < perSubband; channel++) {
      const x = (channel + 0.5) / perSubband;
      let size = level;
      let phase = turn;
      if (gains.bandpass !== undefined) {
        size *= edges(x, gains.bandpass) * Math.max(0.05, 1 + gains.bandpass.ripple * ripple(x));
        phase += gains.bandpass.phase * bend(x);
      }
      const i = at + subband * perSubband + channel;
      table.size[i] = size;
      table.real[i] = size * Math.cos(phase);
      table.imag[i] = size * Math.sin(phase);
    }
  }
}

/** A smooth random curve on 0..1 of unit rms: three sinusoids of 1/2 to 3 cycles. */
function wave(random: Random): (x: number) => number {
  const parts = Array.from({ length: 3 }, () => ({
    cycles: 0.5 + 2.5 * random.uniform(),
    start: 2 * Math.PI * random.uniform(),
  }));
  const scale = Math.sqrt(2 / parts.length);
  return (x) =>
    scale * parts.reduce((sum, { cycles, start }) => sum + Math.sin(2 * Math.PI * cycles * x + start), 0);
}

/** Raised-cosine fall from 1 inside to `edge_level` at the ends of the band. */
function edges(x: number, { edge, edge_level }: { edge: number; edge_level: number }): number {
  const inside = Math.min(x, 1 - x);
  if (edge === 0 || inside >= edge) return 1;
  return edge_level + (1 - edge_level) * 0.5 * (1 - Math.cos((Math.PI * inside) / edge));
}

/** null where there is none */
export function leakageTable(observation: Observation): LeakageTable | null {
  const { scenario, stations } = observation;
  const rms = scenario.gains.leakage;
  if (rms === 0) return null;
  const random = Random.of(scenario.seed, STREAM.gains, -1);
  const draw = () =>
    Float64Array.from({ length: 2 * stations.length }, () => (rms / Math.SQRT2) * random.normal());
  return { real: draw(), imag: draw() };
}
