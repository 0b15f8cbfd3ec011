/** Everything a check says, as report.json holds it, and the curves that only the page draws. */

import type { Dataset } from "../dataset/dataset.ts";
import type { DetectedEvent } from "../detect/event.ts";
import type { FlagEntry } from "../flags/entry.ts";
import type { Doubt } from "../flags/suggest.ts";
import type { BeamPicture, ImageForecast } from "../imaging/image.ts";
import type { Plan } from "../imaging/plan.ts";
import type { Survey } from "../measure/survey-result.ts";
import type { Measure } from "../measure/table.ts";
import type { Finding, Judgement, Verdict } from "../rules/finding.ts";
import type { FieldChecks } from "./fields.ts";

/** One check of one dataset, with everything the writers need. */
export interface Check {
  readonly dataset: Dataset;
  readonly plan: Plan;
  /** as the data are */
  readonly survey: Survey;
  readonly events: readonly DetectedEvent[];
  readonly measures: ReadonlyMap<string, Measure>;
  readonly before: Judgement;
  /** judged on the measures with the suggested flags applied; the same object when there are none */
  readonly after: Judgement;
  /** `before.findings` with verdicts softened where the flags mend them, flags linked; worst first */
  readonly findings: readonly Finding[];
  readonly flags: readonly FlagEntry[];
  /** what all of them cost together, natural weighting */
  readonly sensitivityLossFraction: number;
  /** samples that look at fault but whose flags would not be worth their cost: for a person to judge */
  readonly doubts: readonly Doubt[];
  readonly image: ImageForecast;
  /** each field judged on its own data; null where there is one alone */
  readonly byField: FieldChecks | null;
  readonly beamPicture: BeamPicture | null;
  readonly verdict: Verdict;
  /** of the rules file set: id and what it was loaded from, "ours" or a path the user gave */
  readonly rulesFrom: readonly { readonly id: string; readonly from: string }[];
  /** what visvet could not see in this dataset, sentences */
  readonly blindSpots: readonly string[];
}
