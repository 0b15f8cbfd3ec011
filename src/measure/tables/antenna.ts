/** The `antenna` measure. */
import { median } from "../../util/statistics.ts";
import { fillMeasure } from "../fill-measure.ts";
import { ANTENNA } from "../forms.ts";
import type { BareSurvey } from "../survey-result.ts";
import type { Measure } from "../table.ts";
import type { BaselineFacts } from "./baseline.ts";
import type { Counts } from "./counts.ts";

/** Rounds of the median polish; it settles in a few. */
const ROUNDS = 10;

export function antennaMeasure(survey: BareSurvey, facts: BaselineFacts): Measure {
  const { array } = survey.dataset;
  const names = new Map(array.antennas.map(({ number, name }) => [number, name]));
  const numbers = new Set([
    ...names.keys(),
    ...survey.baselines.flatMap(({ antenna1, antenna2 }) => [antenna1, antenna2]),
    ...facts.counts.otherAntennas,
  ]);
  const antennas = [...numbers].sort((a, b) => a - b);
  const own = new Map<number, number[]>(antennas.map((antenna) => [antenna, []]));
  for (const [b, { antenna1, antenna2 }] of survey.baselines.entries()) {
    own.get(antenna1)!.push(b);
    own.get(antenna2)!.push(b);
  }
  const gains = medianPolish(survey, facts, own);
  const counts = new Map(antennas.map((antenna) => [antenna, countsOf(antenna, own.get(antenna)!, facts)]));
  const typicalFlagged = median(antennas.map((antenna) => counts.get(antenna)!.flaggedFraction));
  const ofOwn = (antenna: number, values: Float64Array) => median(own.get(antenna)!.map((b) => values[b]!));
  const sigmas = new Map(antennas.map((antenna) => [antenna, ofOwn(antenna, facts.sigma)]));
  const typicalSigma = median([...sigmas.values()]);
  const coherences = new Map(antennas.map((antenna) => [antenna, ofOwn(antenna, facts.coherence)]));
  const typicalCoherence = median([...coherences.values()]);
  const typicalHands = median(facts.handRatio);
  const typicalWeightScatter = median(facts.weightScatter);
  const rows = antennas.map((antenna) => ({
    antenna,
    name: names.get(antenna) ?? null,
    in_table: array.fromTable && names.has(antenna) ? 1 : 0,
    baselines: own.get(antenna)!.length + facts.counts.otherBaselinesOf(antenna),
    ...counts.get(antenna)!.row,
    flagged_beyond_typical: counts.get(antenna)!.flaggedFraction - typicalFlagged,
    amplitude_median: ofOwn(antenna, facts.amplitude),
    noise_sigma: sigmas.get(antenna)!,
    noise_ratio: sigmas.get(antenna)! / typicalSigma,
    amplitude_ratio: gains.get(antenna)!,
    hand_ratio: ofOwn(antenna, facts.handRatio) / typicalHands,
    coherence: coherences.get(antenna)!,
    coherence_ratio: coherences.get(antenna)! / typicalCoherence,
    weight_scatter_ratio: ofOwn(antenna, facts.weightScatter) / typicalWeightScatter,
  }));
  return fillMeasure(ANTENNA, rows);
}

function countsOf(antenna: number, own: readonly number[], facts: BaselineFacts): Counts {
  const counts = facts.counts.ofOthers(antenna);
  for (const b of own) counts.add(facts.counts.of(b));
  return counts;
}

/**
 * Gain of each antenna over the typical one, from log amplitude = a_i + a_j by median polish (Tukey 1977, Exploratory
 * Data Analysis), which structure of the sky on fewer than half of the baselines does not move. NaN without data.
 */
function medianPolish(survey: BareSurvey, facts: BaselineFacts, own: ReadonlyMap<number, readonly number[]>) {
  const { baselines } = survey;
  const logs = facts.amplitude.map(Math.log);
  const overall = median(logs) / 2;
  const gains = new Map([...own.keys()].map((antenna) => [antenna, 0]));
  const other = (b: number, antenna: number) =>
    baselines[b]!.antenna1 === antenna ? baselines[b]!.antenna2 : baselines[b]!.antenna1;
  for (let round = 0; round < ROUNDS; round++) {
    for (const [antenna, list] of own) {
      const said = median(list.map((b) => logs[b]! - 2 * overall - gains.get(other(b, antenna))!));
      if (!Number.isNaN(said)) gains.set(antenna, said);
    }
    const middle = median([...gains.values()]);
    for (const [antenna, gain] of gains) gains.set(antenna, gain - middle);
  }
  const hasData = (antenna: number) => own.get(antenna)!.some((b) => Number.isFinite(logs[b]!));
  return new Map(
    [...gains].map(([antenna, gain]) => [antenna, hasData(antenna) ? Math.exp(gain) : Number.NaN]),
  );
}
