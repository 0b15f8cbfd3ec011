/** Every measure of the survey, by name. */
import type { Gleanings } from "./gleanings.ts";
import type { BareSurvey } from "./survey-result.ts";
import type { Measures } from "./table.ts";
import { antennaMeasure } from "./tables/antenna.ts";
import { channelMeasure, polarizationMeasure, subbandMeasure } from "./tables/band.ts";
import { baselineFacts, baselineMeasure } from "./tables/baseline.ts";
import { datasetMeasure } from "./tables/dataset.ts";
import { gapMeasure } from "./tables/gap.ts";
import { fieldMeasure, integrationMeasure, scanMeasure } from "./tables/time.ts";

export function surveyMeasures(survey: BareSurvey, gleanings: Gleanings): Measures {
  const facts = baselineFacts(survey, gleanings.counts);
  const measures = [
    datasetMeasure(survey, facts, gleanings),
    antennaMeasure(survey, facts),
    baselineMeasure(survey, facts),
    channelMeasure(survey, gleanings),
    subbandMeasure(survey, gleanings),
    polarizationMeasure(survey, gleanings),
    fieldMeasure(survey),
    scanMeasure(survey),
    integrationMeasure(survey, facts, gleanings.integrations),
    gapMeasure(survey, gleanings.integrations),
  ];
  return new Map(measures.map((measure) => [measure.name, measure]));
}
