/** Every measure of the survey, by name. */
import type { Gleanings } from "./gleanings.ts";
import { type BareSurvey, baselinesMet } from "./survey-result.ts";
import type { Measure, Measures } from "./table.ts";
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
    ofChoice(survey, fieldMeasure(survey)),
    ofChoice(survey, scanMeasure(survey)),
    ofChoice(survey, integrationMeasure(survey, facts, gleanings.integrations)),
    gapMeasure(survey, gleanings.integrations),
  ];
  return new Map(measures.map((measure) => [measure.name, measure]));
}

/** A measure of the tracks says where they are not of all baselines. */
function ofChoice(survey: BareSurvey, measure: Measure): Measure {
  const { baselines, others } = survey;
  if (others === undefined) return measure;
  const choice = `on an even choice of ${baselines.length} of ${baselinesMet(survey)} baselines`;
  return { ...measure, title: `${measure.title}, ${choice}` };
}
