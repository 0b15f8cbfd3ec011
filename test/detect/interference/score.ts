/** How well suggested flags meet the truth of a simulated dataset. */

import type { Selection } from "../../../src/dataset/selection.ts";
import { compileSelections } from "../../../src/dataset/selection-matcher.ts";
import type { DetectedEvent } from "../../../src/detect/event.ts";
import { detectInterference } from "../../../src/detect/interference/interference.ts";
import type { DetectRequest } from "../../../src/detect/request.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import type { Simulated } from "../../../src/simulate/simulate.ts";

export interface Score {
  readonly events: readonly DetectedEvent[];
  /** of the samples touched, those suggested; 1 where none is touched */
  readonly recall: number;
  /** of the samples suggested, those touched; 1 where none is suggested */
  readonly precision: number;
  /** samples suggested over all */
  readonly suggested: number;
}

export const CONTINUUM: DetectRequest = { purpose: "continuum", lineChannels: [] };

/** @param fault index of the fault to find; without it, all that spoil values */
export async function scoreOf(
  { dataset, truth }: Simulated,
  request: DetectRequest = CONTINUUM,
  explained: readonly Selection[] = [],
  fault?: number,
): Promise<Score> {
  const survey = await surveyDataset(dataset);
  const events = await detectInterference(survey, request, explained);
  const flags = events.flatMap(({ flag, alsoFlag }) => (flag === null ? [] : [flag, ...(alsoFlag ?? [])]));
  const matcher = compileSelections(dataset, flags);
  const { subbands, channels, polarizations } = dataset.shape;
  const rowSamples = subbands * channels * polarizations;
  const suggested = new Uint8Array(rowSamples);
  const count = { both: 0, suggested: 0, touched: 0, all: 0 };
  for await (const block of dataset.blocks({ want: "weights" })) {
    const touched = truth.mask(block, fault);
    for (let row = 0; row < block.rows; row++) {
      suggested.fill(0);
      const matches = matcher.matchRow(block, row);
      for (const selection of matcher.matched.subarray(0, matches)) {
        const runs = matcher.runs[selection]!;
        for (let r = 0; r < runs.length; r += 2) suggested.fill(1, runs[r]!, runs[r + 1]!);
      }
      for (let sample = 0; sample < rowSamples; sample++) {
        const at = row * rowSamples + sample;
        if (!(block.weight[at]! > 0)) continue;
        count.all += 1;
        count.suggested += suggested[sample]!;
        count.touched += touched[at]!;
        count.both += suggested[sample]! & touched[at]!;
      }
    }
  }
  return {
    events,
    recall: count.touched === 0 ? 1 : count.both / count.touched,
    precision: count.suggested === 0 ? 1 : count.both / count.suggested,
    suggested: count.suggested / count.all,
  };
}
