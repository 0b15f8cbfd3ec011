/** `report.json` and `flags.json`: the contracts for other programs. Units are in the keys; see the schemas beside. */
import { basename } from "node:path";
import type { Dataset } from "../dataset/dataset.ts";
import type { Selection } from "../dataset/selection.ts";
import type { FlagEntry, FlagFile } from "../flags/entry.ts";
import type { ImageForecast } from "../imaging/image.ts";
import type { Plan } from "../imaging/plan.ts";
import { baselinesMet } from "../measure/survey-result.ts";
import type { Measure } from "../measure/table.ts";
import type { Finding } from "../rules/finding.ts";
import { frequencyRange } from "./dataset-facts.ts";
import type { FieldChecks } from "./fields.ts";
import type { Check } from "./report.ts";
import { tool } from "./tool.ts";
import { exactly, jsonText } from "./trim.ts";

/** The whole check as `report.json` holds it, ending in a line end. */
export function reportJson(check: Check): string {
  const { advice } = check.image;
  return jsonText({
    format: "visvet-report",
    version: 1,
    tool: tool(),
    dataset: datasetPart(check),
    plan: planPart(check.plan),
    score: Math.round(check.before.score),
    scoreAfterFlags: Math.round(check.after.score),
    verdict: check.verdict,
    findings: check.findings.map(findingPart),
    flags: flagsPart(check),
    image: imagePart(check.image),
    settings: advice,
    byField: check.byField === null ? undefined : fieldsPart(check.byField),
    measures: Object.fromEntries([...check.measures].map(([name, measure]) => [name, measurePart(measure)])),
    provenance: provenancePart(check),
  });
}

function imagePart({ weightings, wTerm, smearing, coverage, limits }: ImageForecast): object {
  return { weightings, wTerm, smearing, coverage, limits } satisfies Omit<ImageForecast, "advice">;
}

function fieldsPart({ judged, left, main }: FieldChecks): object {
  return {
    judged: judged.map((one) => ({
      id: one.field.id,
      name: one.field.name,
      main: one.field.id === main,
      rows: one.rows,
      weightFraction: one.weightFraction,
      score: Math.round(one.score),
      scoreAfterFlags: Math.round(one.scoreAfterFlags),
      verdict: one.verdict,
      findings: one.findings.map(findingPart),
      plan: planPart(one.plan),
      image: imagePart(one.image),
    })),
    left: left.map(({ id, name, why }) => ({ id, name, why })),
  };
}

/** The suggested flags as `flags.json` holds them, ending in a line end. */
export function flagsJson(check: Check): string {
  return jsonText({
    format: "visvet-flags",
    version: 1,
    dataset: check.dataset.name,
    entries: check.flags.map(flagPart),
  } satisfies Record<keyof FlagFile, unknown>);
}

function datasetPart(check: Check): object {
  const { dataset, survey } = check;
  const { totals, times } = survey;
  const [lowest, highest] = frequencyRange(dataset);
  return {
    name: dataset.name,
    format: dataset.format,
    array: dataset.array.name,
    unit: dataset.unit,
    rows: totals.rows,
    samples: totals.samples,
    usable: totals.usable,
    flagged: totals.flagged,
    bad: totals.bad,
    zero: totals.zero,
    autocorrelationRows: totals.autocorrelationRows,
    duplicateRows: totals.duplicateRows,
    outOfOrderRows: totals.outOfOrderRows,
    badTimeRows: totals.badTimeRows,
    badUvwRows: totals.badUvwRows,
    antennas: survey.antennasWithData.length,
    baselines: baselinesMet(survey),
    integrations: times.length,
    channels: dataset.shape.channels,
    subbands: dataset.shape.subbands,
    polarizations: dataset.shape.polarizations,
    fields: dataset.fields.length,
    time: times.length === 0 ? null : exactly([times[0]!, times[times.length - 1]!]),
    integrationSeconds: survey.integration,
    lowestFrequencyHz: exactly(lowest),
    highestFrequencyHz: exactly(highest),
    polarizationNames: dataset.polarizations,
    antennaList: antennaList(dataset, new Set(survey.antennasWithData)),
    fieldList: dataset.fields.map(({ id, name, rightAscension, declination, equinox }) => ({
      id,
      name,
      rightAscensionRad: exactly(rightAscension),
      declinationRad: exactly(declination),
      equinox,
    })),
    notes: dataset.notes.map(({ kind, code, text }) => ({ kind, code, text })),
  };
}

function antennaList(dataset: Dataset, withData: ReadonlySet<number>): object[] {
  return dataset.array.antennas.map(({ number, name, position, diameter }) => ({
    number,
    name,
    hasData: withData.has(number),
    positionMetres: exactly(position),
    diameterMetres: diameter,
  }));
}

function planPart(plan: Plan): Readonly<Record<string, Plan[keyof Plan]>> {
  return {
    fieldOfViewRad: plan.fieldOfView,
    resolutionRad: plan.resolution,
    largestScaleRad: plan.largestScale,
    targetRmsJy: plan.targetRms,
    dynamicRangeRatio: plan.dynamicRange,
    dishDiameterMetres: plan.dishDiameter,
    weighting: plan.weighting,
    correctsW: plan.correctsW,
    purpose: plan.purpose,
    lineChannels: plan.lineChannels,
    expectedSefdJy: plan.expectedSefd,
  };
}

function flagsPart(check: Check): object {
  return {
    file: "flags.json",
    sensitivityLossFraction: check.sensitivityLossFraction,
    entries: check.flags.map(flagPart),
    doubts: check.doubts.map(({ rule, reason, why, selection }) => ({
      rule,
      reason,
      why,
      ...selectionPart(selection),
    })),
  };
}

export function selectionPart(selection: Selection): object {
  const { antennas, baselines, time, subbands, channels, polarizations, fields } = selection;
  return { antennas, baselines, time: exactly(time), subbands, channels, polarizations, fields };
}

/** Keys in the order of the contract, whatever the order they were made in; times to the last bit. */
export function flagPart(flag: FlagEntry): object {
  const { id, rule, reason, samples, fraction, confidence, cost } = flag;
  return {
    id,
    rule,
    reason,
    ...selectionPart(flag),
    samples,
    fraction,
    confidence,
    cost,
  };
}

function findingPart(finding: Finding): object {
  const { rule, family, verdict, severity, title, scope, measured, limits, mendedByFlags } = finding;
  const { antennas, baselines, time, subbands, channels, polarizations, fields } = scope;
  const { consequence, evidence, suggests, flags } = finding;
  return {
    rule,
    family,
    verdict,
    severity,
    title,
    scope: { antennas, baselines, time: exactly(time), subbands, channels, polarizations, fields },
    measured: { value: measured.value, unit: measured.unit },
    limits: { caution: limits.caution, hold: limits.hold, unit: limits.unit, from: limits.from },
    mendedByFlags,
    consequence: { text: consequence.text, value: consequence.value, unit: consequence.unit },
    evidence,
    suggests,
    flags,
  };
}

/** Rows of a measure that are written: an array of hundreds of antennas has hundreds of thousands of baselines. */
const MOST_ROWS = 20_000;

/** A measure by columns: numbers that are unknown are null. */
function measurePart(measure: Measure): object {
  const names = new Set(measure.table.columnNames());
  const rows = measure.table.numRows();
  const every = Math.max(1, Math.ceil(rows / MOST_ROWS));
  return {
    title: measure.title,
    each: measure.each,
    rows,
    // Only where not all rows are there: the others are in the tables that --tables writes.
    every: every === 1 ? undefined : every,
    columns: measure.columns
      .filter(({ name }) => names.has(name))
      .map(({ name, unit, meaning }) => ({
        name,
        unit,
        meaning,
        values: valuesOf(measure, name, unit, every),
      })),
  };
}

function valuesOf(measure: Measure, name: string, unit: string, every: number): unknown {
  const all = Array.from(measure.table.array(name) as ArrayLike<unknown>);
  const values = every === 1 ? all : all.filter((_, row) => row % every === 0);
  return unit === "d" ? exactly(values) : values;
}

function provenancePart(check: Check): object {
  const { dataset } = check;
  return {
    // Names without folders: the same data checked elsewhere give the same report.
    files: dataset.files.map((file) => basename(file)),
    bytes: dataset.bytes,
    header: dataset.header,
    rules: check.rulesFrom,
    pointsTaken: check.before.taken,
    pointsTakenAfterFlags: check.after.taken,
    notJudged: check.before.notJudged,
    blindSpots: check.blindSpots,
  };
}
