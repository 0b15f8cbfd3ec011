/** Every measure of the survey, by name. */
import type { SurveyPart } from "./survey-part.ts";
import type { BareSurvey } from "./survey-result.ts";
import type { Measures } from "./table.ts";
import { antennaMeasure } from "./tables/antenna.ts";
import { channelMeasure, polarizationMeasure, subbandMeasure } from "./tables/band.ts";
import { baselineFacts, baselineMeasure } from "./tables/baseline.ts";
import { datasetMeasure } from "./tables/dataset.ts";
import { fieldMeasure, integrationMeasure, scanMeasure } from "./tables/time.ts";

export function surveyMeasures(survey: BareSurvey, part: SurveyPart): Measures {
  const facts = baselineFacts(survey);
  const measures = [
    datasetMeasure(survey),
    antennaMeasure(survey, facts),
    baselineMeasure(survey, facts),
    channelMeasure(survey, part.channels),
    subbandMeasure(survey, part.channels),
    polarizationMeasure(survey, part.channels),
    fieldMeasure(survey),
    scanMeasure(survey),
    integrationMeasure(survey, facts),
  ];
  return new Map(measures.map((measure) => [measure.name, measure]));
}
