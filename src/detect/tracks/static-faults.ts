/** Antennas that are out of family throughout: weak, noisy, or with weights that their scatter belies. */
import { median, robustSigma } from "../../util/statistics.ts";
import type { DetectedEvent } from "../event.ts";
import type { Grid } from "./grid.ts";
import { levelPoints, levelsByAntenna } from "./levels-by-antenna.ts";
import { makeEvent } from "./make-event.ts";

const THRESHOLD = 6;
const FEWEST_ANTENNAS = 4;

/** Noise above this, times the typical one, is called noisy. */
const NOISY = 1.2;
const NOISY_UNCALIBRATED = 2;

/** Gains below this are called weak. */
const WEAK = 0.7;
/** A sky of two bright sources can make one antenna's baselines all faint: their scatter does not tell it is the sky's. */
const WEAK_THRESHOLD = 9;
/** Neighbours in the uv plane tell a level no better than this. */
const LEAST_ERROR = 0.01;

/** @param skip antennas (indices) that another event explains */
export function weakAntennas(grid: Grid, skip: ReadonlySet<number>): DetectedEvent[] {
  if (grid.antennas.length < FEWEST_ANTENNAS) return [];
  const polarizations = [...new Set(grid.planes.map(({ polarization }) => polarization))];
  const found = polarizations.map((polarization) => {
    const planes = grid.planes.filter((plane) => plane.polarization === polarization);
    const points = levelPoints(grid, planes);
    const weak = new Map<number, { log: number; error: number; z: number }>();
    let logs: number[] = [];
    for (let round = 0; round < 3; round++) {
      const levels = levelsByAntenna(grid, points, new Set([...skip, ...weak.keys()]));
      const known = levels.map((level, a) =>
        skip.has(a) || weak.has(a) || level.stretches < 3 ? Number.NaN : level.logAmplitude,
      );
      const [middle, family] = [median(known), robustSigma(known)];
      logs = levels.map(({ logAmplitude }) => logAmplitude - middle);
      let more = false;
      for (const [a, level] of levels.entries()) {
        if (Number.isNaN(known[a]!)) continue;
        const log = known[a]! - middle;
        const error = Math.max(level.scatter / Math.sqrt(level.stretches / 2), 0.5 * level.powerError);
        const z = -log / Math.max(family, error, 0.03);
        if (z < WEAK_THRESHOLD || log > Math.log(WEAK) || level.below < 0.9 || level.expected < 8) continue;
        weak.set(a, { log, error: Math.max(error, family, LEAST_ERROR), z });
        more = true;
      }
      if (!more) break;
    }
    return { polarization, weak, logs };
  });
  return grid.antennas.flatMap((number, a) => {
    if (!found.some(({ weak }) => weak.has(a))) return [];
    // The other hand may be as weak, and miss the limits by its noise.
    const clear = Math.max(...found.map(({ weak }) => weak.get(a)?.log ?? Number.NEGATIVE_INFINITY));
    const own = found.filter(({ weak, logs }) => weak.has(a) || logs[a]! < clear / 2);
    const facts = own.flatMap(({ weak }) => weak.get(a) ?? []);
    const size = Math.exp(median(facts.map(({ log }) => log)));
    const error = size * median(facts.map((fact) => fact.error));
    const all = own.length === polarizations.length;
    const hands = own.map(({ polarization }) => polarization);
    return [
      makeEvent(grid, {
        kind: "weak-antenna",
        cause: "antenna",
        scope: { antennas: [number], polarizations: all ? null : hands },
        size,
        sizeError: error,
        unit: "ratio",
        significance: Math.max(...facts.map(({ z }) => z)),
        evidence:
          `Antenna ${number} shows ${size.toFixed(2)} of the amplitude that the rest of the array makes likely on its baselines` +
          `${all ? "" : ` in ${hands.join(" and ")}`}.`,
        repair: `a calibration of antenna ${number}'s gain restores its amplitude, not its signal-to-noise ratio`,
      }),
    ];
  });
}

interface Outlier {
  readonly antenna: number;
  readonly log: number;
  readonly error: number;
  readonly z: number;
}

/** Antennas whose baselines are out by a common factor; `value` by baseline, natural logarithms, NaN unknown. */
function outlyingAntennas(grid: Grid, value: readonly number[], least: number): Outlier[] {
  const found: Outlier[] = [];
  const taken = new Set<number>();
  const antennas = grid.antennas.map((_, a) => a);
  for (let round = 0; round < antennas.length / 2; round++) {
    const free = (b: number, but = -1) =>
      (!taken.has(grid.first[b]!) || grid.first[b] === but) &&
      (!taken.has(grid.second[b]!) || grid.second[b] === but);
    const typical = median(value.filter((_, b) => free(b)));
    const own = antennas.map((a) =>
      median(grid.touching[a]!.filter((b) => free(b, a)).map((b) => value[b]! - typical)),
    );
    const family = robustSigma(own.filter((_, a) => !taken.has(a)));
    let best: Outlier | null = null;
    for (const a of antennas) {
      if (taken.has(a)) continue;
      const baselines = grid.touching[a]!.filter((b) => free(b, a)).map((b) => value[b]! - typical);
      const log = own[a]!;
      const alike = baselines.filter(
        (x) => Math.sign(x) === Math.sign(log) && Math.abs(x) > Math.abs(log) / 2,
      );
      if (alike.length < 0.75 * baselines.length || !(Math.abs(log) > least)) continue;
      const error = robustSigma(baselines) / Math.sqrt(Math.max(1, baselines.length));
      const z = Math.abs(log) / Math.max(family, error, 0.02);
      if (z > THRESHOLD && z > (best?.z ?? 0)) best = { antenna: a, log, error: Math.max(error, 0.01), z };
    }
    if (best === null) break;
    found.push(best);
    taken.add(best.antenna);
  }
  return found;
}

export function noisyAntennas(grid: Grid): DetectedEvent[] {
  if (grid.antennas.length < FEWEST_ANTENNAS) return [];
  const value = columnOf(grid, "noise_sigma").map(Math.log);
  // Before calibration noise follows the gain, and gains differ.
  const least = grid.survey.dataset.unit === "Jy" ? NOISY : NOISY_UNCALIBRATED;
  return outlyingAntennas(grid, value, Math.log(least))
    .filter(({ log }) => log > 0)
    .map(({ antenna, log, error, z }) => {
      const number = grid.antennas[antenna]!;
      const size = Math.exp(log);
      return makeEvent(grid, {
        kind: "noisy",
        cause: "antenna",
        scope: { antennas: [number] },
        size,
        sizeError: size * error,
        unit: "ratio",
        significance: z,
        evidence: `The noise on antenna ${number}'s baselines is ${size.toFixed(2)} times the array's typical one, on all of them alike.`,
        repair: "weights that tell this noise make the most of its data",
      });
    });
}

/** @param skip antennas (numbers) whose noise is out of family: weights that have not heard of it are no second fault */
export function weightMismatches(grid: Grid, skip: ReadonlySet<number>): DetectedEvent[] {
  if (!grid.survey.dataset.hasWeights || grid.antennas.length < FEWEST_ANTENNAS) return [];
  // sigma sqrt(weight): its square is how many times too large the weight is.
  const value = columnOf(grid, "weight_scatter_ratio").map((ratio) => 2 * Math.log(ratio));
  // A noise that the sky's own changes feign leaves the weights in family.
  const weights = weightsOf(grid);
  const usual = median(weights);
  const differ = (of: readonly number[], log: number) => {
    const own = median(of.map((b) => Math.log(weights[b]! / usual)));
    return own * log > 0 && Math.abs(own) > Math.abs(log) / 3;
  };
  const events: DetectedEvent[] = [];
  const named = new Set<number>();
  for (const { antenna, log, error, z } of outlyingAntennas(grid, value, Math.log(1.3))) {
    const number = grid.antennas[antenna]!;
    named.add(number);
    if (skip.has(number) || !differ(grid.touching[antenna]!, log)) continue;
    events.push(mismatch(grid, { antennas: [number] }, `antenna ${number}'s baselines`, log, error, z));
  }
  const rest = grid.survey.baselines
    .map(({ antenna1, antenna2 }, b) => ({ b, antenna1, antenna2, value: value[b]! }))
    .filter(({ antenna1, antenna2 }) => !named.has(antenna1) && !named.has(antenna2));
  const typical = median(rest.map((one) => one.value));
  const scale = Math.max(0.03, robustSigma(rest.map((one) => one.value)));
  for (const one of rest) {
    const log = one.value - typical;
    const z = Math.abs(log) / scale;
    if (!(z > 12 && Math.abs(log) > Math.log(2.5)) || !differ([one.b], log)) continue;
    const pair = [one.antenna1, one.antenna2] as const;
    events.push(mismatch(grid, { baselines: [pair] }, `baseline ${pair[0]}-${pair[1]}`, log, scale, z));
  }
  return events;
}

function mismatch(
  grid: Grid,
  scope: { antennas: number[] } | { baselines: (readonly [number, number])[] },
  who: string,
  log: number,
  error: number,
  z: number,
): DetectedEvent {
  const size = Math.exp(log);
  return makeEvent(grid, {
    kind: "weight-mismatch",
    cause: "antennas" in scope ? "antenna" : "baseline",
    scope,
    flag: null,
    size,
    sizeError: size * error,
    unit: "ratio",
    significance: z,
    evidence: `The weights of ${who} are ${size.toFixed(2)} times what the scatter of their samples calls for, as against the rest of the array.`,
    repair: `multiply the weights of ${who} by ${(1 / size).toPrecision(3)}`,
  });
}

/** Median weight of a sample by baseline; NaN without usable samples. */
function weightsOf({ survey, baselines, planes }: Grid): number[] {
  const { tracks, dataset } = survey;
  const { subbands, polarizations } = dataset.shape;
  return Array.from({ length: baselines }, (_, b) => {
    const weights: number[] = [];
    for (let cell = tracks.firstCell[b]!; cell < tracks.firstCell[b + 1]!; cell++) {
      for (const { subband, product } of planes) {
        const at = (cell * subbands + subband) * polarizations + product;
        if (tracks.usable[at]! > 0) weights.push(tracks.weight[at]! / tracks.usable[at]!);
      }
    }
    return median(weights);
  });
}

/** A column of the measure "baseline", by number of the baseline; NaN for those that the measure leaves out. */
function columnOf({ survey }: Grid, name: string): number[] {
  const table = survey.measures.get("baseline")?.table;
  if (table === undefined) return survey.baselines.map(() => Number.NaN);
  const [first, second, column] = ["antenna1", "antenna2", name].map((one) => table.array(one));
  const rows = new Map<number, number>();
  for (let row = 0; row < table.numRows(); row++) {
    rows.set(Number(first![row]) * 65_536 + Number(second![row]), row);
  }
  return survey.baselines.map(({ antenna1, antenna2 }) => {
    const row = rows.get(antenna1 * 65_536 + antenna2);
    return row === undefined ? Number.NaN : Number(column![row]);
  });
}
