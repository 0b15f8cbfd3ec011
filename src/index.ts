/**
 * visvet as a library: the same calls that the command makes.
 *
 * ```ts
 * import { applyFlags, check, loadRules, openDataset, readPlan, writeText } from "visvet";
 *
 * const dataset = await openDataset("night12.uvfits");
 * const result = await check(dataset, { plan: await readPlan("deep.yaml"), rules: await loadRules() });
 * console.log(result.verdict, result.before.score, result.after.score);
 * console.log(writeText(result, { width: 100, colour: false }));
 * await applyFlags({ dataset, flags: result.flags, out: "night12-flagged.uvfits" });
 * ```
 *
 * Or each stage by itself: `survey`, `derivePlan`, `detect`, `forecast`, `judge`, `suggestFlags`, `reconcile`.
 *
 * Units are SI and radians unless a name says otherwise; times are MJD (UTC, days). Whatever is wrong with an input is
 * thrown as `InputError`, whose `line` says what, where and what to do.
 */

export type {
  Antenna,
  ArrayInfo,
  BlockRequest,
  Dataset,
  Field,
  Note,
  Polarization,
  SampleBlock,
  Setup,
  Shape,
} from "./dataset/dataset.ts";
export { sampleIndex } from "./dataset/dataset.ts";
export { fieldNamed, fieldView } from "./dataset/field-view.ts";
export {
  countSelections,
  flaggedView,
  type SelectionCount,
  type SelectionCounts,
} from "./dataset/flagged-view.ts";
export { openDataset } from "./dataset/open.ts";
export { parsePlan, readPlan } from "./dataset/plan-file.ts";
export type { LineRange, PlanRequest, Weighting } from "./dataset/plan-request.ts";
export { type DatasetRecipe, type OpenOptions, reopen } from "./dataset/recipe.ts";
export type { Selection } from "./dataset/selection.ts";
export { detect } from "./detect/detect.ts";
export type { DetectedEvent, EventKind } from "./detect/event.ts";
export { eventMeasures } from "./detect/event-table.ts";
export type { DetectRequest } from "./detect/request.ts";
export {
  type AcceptedFlag,
  type AcceptedFlags,
  type Choice,
  chooseFlags,
} from "./flags/accepted.ts";
export { type Applied, type ApplyRequest, applyFlags, countFlags } from "./flags/apply/apply.ts";
export type { FlagPlace } from "./flags/apply/copy-files.ts";
export type { FlagCost, FlagEntry, FlagFile } from "./flags/entry.ts";
export { parseFlagFile, readFlagFile } from "./flags/flag-file.ts";
export { readFlags } from "./flags/read-flags.ts";
export { reconcile } from "./flags/reconcile.ts";
export { type Doubt, suggestFlags, withCosts } from "./flags/suggest.ts";
export { derivePlan } from "./imaging/derive-plan.ts";
export { type Forecast, forecast, forecastAfter } from "./imaging/forecast.ts";
export type { ImageForecast } from "./imaging/image.ts";
export type { Plan, PlanValue } from "./imaging/plan.ts";
export {
  gatherParts,
  identityOf,
  isMade,
  joinPartFiles,
  makePart,
  type PartRequest,
  type PartSet,
} from "./measure/part-files.ts";
export type { PartIdentity } from "./measure/state/identity.ts";
export { type SurveyOptions, surveyDataset, surveyDataset as survey } from "./measure/survey.ts";
export type { Baseline, Levels, Survey, Totals, Tracks } from "./measure/survey-result.ts";
export type { Column, Measure, Measures } from "./measure/table.ts";
export { type NightlyRequest, type NightlyResult, runNightly } from "./nightly/nightly.ts";
export { type PlanChoice, readPlanChoices } from "./nightly/plans.ts";
export { type CheckRequest, checkDataset, checkDataset as check } from "./report/check.ts";
export { describeText, describeText as describe } from "./report/describe.ts";
export type { FieldCheck, FieldChecks } from "./report/fields.ts";
export { writeHtml } from "./report/html.ts";
export { flagsJson, reportJson } from "./report/json.ts";
export type { Check } from "./report/report.ts";
export { type TextOptions, writeText } from "./report/text.ts";
export { type FlagFormat, flagBytes, type WrittenFlags, writeFlags } from "./report/write-flags.ts";
export { writeReports } from "./report/write-reports.ts";
export { measureTable, writeTables } from "./report/write-tables.ts";
export type { Family, Finding, Judgement, Verdict } from "./rules/finding.ts";
export type { Judged } from "./rules/hit.ts";
export { judge } from "./rules/judge.ts";
export { loadRules } from "./rules/load.ts";
export type { Rule, RuleSet } from "./rules/rule.ts";
export { readScenario } from "./simulate/scenario-file.ts";
export { type Simulated, simulate } from "./simulate/simulate.ts";
export { simulateFile } from "./simulate/simulate-file.ts";
export type { CellType, ColumnTable, NamedColumn, TableFormat } from "./util/column-table.ts";
export { InputError, type Place } from "./util/errors.ts";
export { Workers } from "./util/workers.ts";
