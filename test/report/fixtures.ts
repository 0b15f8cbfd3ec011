/**
 * Checks of an invented array, made by hand: what the writers of reports get, without the stages that make it. The
 * numbers are those such an array would have; nothing here is measured.
 */
import { table } from "arquero";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import type { DetectedEvent } from "../../src/detect/event.ts";
import type { FlagCost, FlagEntry } from "../../src/flags/entry.ts";
import type { Beam, BeamPicture, Coverage, ImageForecast } from "../../src/imaging/image.ts";
import type { Plan } from "../../src/imaging/plan.ts";
import type { Measure } from "../../src/measure/table.ts";
import type { Check } from "../../src/report/report.ts";
import type { Finding, Judgement } from "../../src/rules/finding.ts";
import { fixtureDataset, fixtureSurvey, INTERFERENCE, JUMP, SILENT } from "./fixture-survey.ts";

const ARCSEC = Math.PI / 648000;

export function fixturePlan(): Plan {
  return {
    fieldOfView: { value: 5400 * ARCSEC, origin: "given", how: "field_of_view of the plan" },
    resolution: { value: 9.1 * ARCSEC, origin: "derived", how: "geometric mean of the fitted robust beam" },
    largestScale: { value: 600 * ARCSEC, origin: "given", how: "largest_scale of the plan" },
    targetRms: { value: 45e-6, origin: "given", how: "target_rms of the plan" },
    dynamicRange: { value: 5000, origin: "given", how: "dynamic_range of the plan" },
    dishDiameter: { value: 13.5, origin: "file", how: "the antenna table" },
    weighting: {
      value: { kind: "robust", robust: 0 },
      origin: "default",
      how: "a compromise of resolution and noise",
    },
    correctsW: { value: false, origin: "default", how: "nothing says that the imager corrects it" },
    purpose: { value: "continuum", origin: "default", how: "nothing else was planned" },
    lineChannels: { value: [], origin: "default", how: "none are protected" },
    expectedSefd: { value: null, origin: "default", how: "not given" },
  };
}

const beam = (major: number, sidelobe: number, noise: number): Beam => ({
  majorArcsec: major,
  minorArcsec: major * 0.81,
  positionAngleDeg: -34.2,
  peakSidelobeFraction: sidelobe,
  peakSidelobeEastArcsec: 24.5,
  peakSidelobeNorthArcsec: -11,
  rmsSidelobeFraction: Math.abs(sidelobe) / 6,
  noiseJy: noise,
});

const coverage = (filled: number, gap: number): Coverage => ({
  filledFraction: filled,
  largestRadialGapWavelengths: gap,
  radialGapFromWavelengths: 2940,
  radialGapToWavelengths: 2940 + gap,
  largestRadialGapRatioFraction: (2940 + gap) / 2940,
  largestAzimuthalGapRad: 0.62,
  azimuthalGapAtRad: 1.3,
  azimuthalGapFromWavelengths: 9000,
  azimuthalGapToWavelengths: 13500,
  shortestSpacingWavelengths: 184,
  longestSpacingWavelengths: 19870,
  missingFluxFraction: 0.061,
});

export function fixtureImage(): ImageForecast {
  return {
    weightings: [
      {
        weighting: "natural",
        robust: null,
        planned: false,
        before: beam(14.2, 0.21, 31e-6),
        after: beam(14.3, 0.22, 32.4e-6),
      },
      {
        weighting: "robust",
        robust: 0,
        planned: true,
        before: beam(10.1, -0.118, 38e-6),
        after: beam(10.2, -0.121, 39.9e-6),
      },
      {
        weighting: "uniform",
        robust: null,
        planned: false,
        before: beam(8.7, -0.152, 61e-6),
        after: beam(8.7, -0.155, 64.3e-6),
      },
    ],
    wTerm: {
      largestWavelengths: 7540,
      edgePhaseRad: 1.62,
      edgeLossFraction: 0.187,
      uncorrectedFieldArcsec: 1340,
      phaseLimitRad: 0.1,
      planes: 17,
      facets: 17,
      known: true,
    },
    smearing: {
      bandwidthLossFraction: 0.034,
      timeLossFraction: 0.041,
      safeChannelHz: 1.1e6,
      safeIntegrationSeconds: 29,
      safeLossFraction: 0.01,
    },
    coverage: { before: coverage(0.224, 1310), after: coverage(0.219, 1310) },
    limits: [
      {
        cause: "w-term",
        dynamicRangeFraction: 410,
        text: "The w term, not corrected, smears sources at the edge of the field: 18.7 % of their peak becomes sidelobes.",
      },
      {
        cause: "phase-jump",
        dynamicRangeFraction: 1270,
        text: "The phase jump of 42 deg on antenna Q07 for 27 min.",
      },
      {
        cause: "noise",
        dynamicRangeFraction: 36_800,
        text: "Thermal noise of 38 uJy against a brightest source of 1.4 Jy.",
      },
    ],
    advice: [
      { name: "Cell size", value: "2.7 arcsec", why: "three cells across the minor axis of the robust beam" },
      {
        name: "Image size",
        value: "2048 x 2048",
        why: "covers the field of 1.5 deg, a product of small primes",
      },
      {
        name: "Weighting",
        value: "robust(0)",
        why: "the plan's; natural would be 18 % less noisy and 41 % wider",
      },
      {
        name: "w term",
        value: "17 planes, or 17 facets",
        why: "leaves at most 0.1 rad at the edge of the field",
      },
      { name: "Stop deconvolving at", value: "120 uJy", why: "three times the expected noise of 39.9 uJy" },
      { name: "Leave out", value: "nothing", why: "no range of spacings is bad throughout" },
      {
        name: "Averaging",
        value: "up to 1.1 MHz and 29 s",
        why: "loses at most 1 % at the edge of the field",
      },
    ],
  };
}

export function fixtureFindings(): Finding[] {
  return [
    {
      rule: "w-phase-at-field-edge",
      family: "w-term",
      verdict: "hold",
      severity: 1,
      title: "Phase left by w at the edge of the field",
      scope: {},
      measured: { value: 1.62, unit: "phase" },
      limits: { caution: 0.1, hold: 1, unit: "phase", from: "field_of_view of the plan (given)" },
      mendedByFlags: false,
      consequence: {
        text: "A source at the field edge loses up to 18.7 % of its peak, which returns as sidelobes around it.",
        value: 0.187,
        unit: "fraction",
      },
      evidence: [
        "The largest |w| is 7.54 kilowavelengths, on Q12-Q14.",
        "A field of 22.3 arcmin needs no correction at 0.1 rad.",
      ],
      suggests: "correct-w",
      flags: [],
    },
    {
      rule: "phase-jump",
      family: "phase",
      verdict: "caution",
      severity: 1,
      title: "Phase jump",
      scope: { antennas: [JUMP.antenna], time: [JUMP.from, JUMP.to] },
      measured: { value: 42.1, unit: "deg" },
      limits: { caution: 3.1, hold: 31, unit: "deg", from: "dynamic_range of the plan (given)" },
      mendedByFlags: true,
      consequence: {
        text: "Ghosts along the direction of its baselines; the dynamic range is capped at 1,270.",
        value: 1270,
        unit: "ratio",
      },
      evidence: [
        "All 13 baselines to Q07 turn by 42.1 +- 0.4 deg at 21:45:30 and back at 22:12:30; closure phases stay.",
      ],
      suggests: "calibrate",
      flags: ["F1"],
    },
    {
      rule: "interference-persistent",
      family: "amplitude",
      verdict: "caution",
      severity: 0.62,
      title: "Persistent narrow interference",
      scope: { subbands: [INTERFERENCE.subband], channels: [[...INTERFERENCE.channels]] },
      measured: { value: 14.8, unit: "sigma" },
      limits: { caution: 5, hold: 21, unit: "sigma", from: "target_rms of the plan (given)" },
      mendedByFlags: true,
      consequence: { text: "Stripes of 240 uJy across the whole image.", value: 240e-6, unit: "Jy" },
      evidence: ["Five channels stand 14.8 sigma above their neighbours on 78 of 91 baselines throughout."],
      suggests: "flag",
      flags: ["F2"],
    },
    {
      rule: "silent-antenna",
      family: "amplitude",
      verdict: "caution",
      severity: 0.4,
      title: "Antenna without fringes",
      scope: { antennas: [SILENT] },
      measured: { value: 0.03, unit: "fraction" },
      limits: { caution: 0.5, hold: 0, unit: "fraction", from: "common practice, no source" },
      mendedByFlags: true,
      consequence: {
        text: "It adds noise and no signal: 3.9 % of the weight is spent on it.",
        value: 0.039,
        unit: "fraction",
      },
      evidence: ["The coherent amplitude of its 13 baselines is 3 % of the median antenna's."],
      suggests: "flag",
      flags: ["F3"],
    },
    {
      rule: "radial-gap",
      family: "coverage",
      verdict: "caution",
      severity: 0.21,
      title: "Gap in the range of spacings",
      scope: {},
      measured: { value: 1.45, unit: "ratio" },
      limits: { caution: 1.35, hold: 1.8, unit: "ratio", from: "largest_scale of the plan (given)" },
      mendedByFlags: false,
      consequence: {
        text: "Structure between 48.5 and 70.2 arcsec is unconstrained: deconvolution will guess it.",
        value: 48.5,
        unit: "arcsec",
      },
      evidence: ["No usable sample lies between 2.94 and 4.25 kilowavelengths."],
      suggests: "more-data",
      flags: [],
    },
    {
      rule: "flagged-dataset",
      family: "flagged-fraction",
      verdict: "ready",
      severity: 0,
      title: "Share of the dataset flagged already",
      scope: {},
      measured: { value: 0.152, unit: "fraction" },
      limits: { caution: 0.25, hold: 0.6, unit: "fraction", from: "common practice, no source" },
      mendedByFlags: false,
      consequence: {
        text: "8.2 % of the sensitivity is lost to flags set before.",
        value: 0.082,
        unit: "fraction",
      },
      evidence: [],
      suggests: "none",
      flags: [],
    },
  ];
}

const cost = (sensitivity: number): FlagCost => ({
  sensitivityLossFraction: sensitivity,
  beamMajorChangeFraction: sensitivity * 0.4,
  beamMinorChangeFraction: sensitivity * 0.2,
  peakSidelobeChangeFraction: sensitivity * 1.9,
  largestGapChangeFraction: 0,
});

export function fixtureFlags(): FlagEntry[] {
  return [
    {
      ...EVERYTHING,
      id: "F1",
      rule: "phase-jump",
      reason: "phase of antenna Q07 off by 42.1 deg; calibrating it instead keeps the data",
      antennas: [JUMP.antenna],
      time: [JUMP.from + 30 / 86400, JUMP.to - 30 / 86400],
      samples: 43_524,
      fraction: 0.0368,
      confidence: 0.98,
      cost: cost(0.0186),
    },
    {
      ...EVERYTHING,
      id: "F2",
      rule: "interference-persistent",
      reason: "persistent interference, 14.8 sigma",
      subbands: [INTERFERENCE.subband],
      channels: [[...INTERFERENCE.channels]],
      samples: 95_550,
      fraction: 0.081,
      confidence: 0.995,
      cost: cost(0.0413),
    },
    {
      ...EVERYTHING,
      id: "F3",
      rule: "silent-antenna",
      reason: "no fringes on any baseline of antenna Q11",
      antennas: [SILENT],
      samples: 166_920,
      fraction: 0.1414,
      confidence: 0.93,
      cost: { ...cost(0.0731), beamMajorChangeFraction: Number.NaN, beamMinorChangeFraction: Number.NaN },
    },
  ];
}

const event = (part: Partial<DetectedEvent>): DetectedEvent => ({
  kind: "phase-jump",
  cause: "antenna",
  scope: EVERYTHING,
  flag: null,
  size: 42.1,
  sizeError: 0.4,
  unit: "deg",
  significance: 96,
  confidence: 0.98,
  samples: 43_524,
  outlying: 43_524,
  evidence: "All 13 baselines to Q07 turn by 42.1 deg.",
  repair: null,
  ...part,
});

/** A ring-shaped aperture's beam with a little asymmetry: enough to look at. */
export function fixtureBeam(size = 129): BeamPicture {
  const pixels = new Float32Array(size * size);
  const middle = (size - 1) / 2;
  for (let y = 0; y < size; y++) {
    for (let x = 0; x < size; x++) {
      const [dx, dy] = [(x - middle) * 0.8 + (y - middle) * 0.35, (y - middle) * 0.9];
      const r = Math.hypot(dx, dy) / 2.6;
      const arms = 0.07 * Math.cos(6 * Math.atan2(dy, dx) + 0.4) * Math.exp(-((r - 9) ** 2) / 30);
      pixels[y * size + x] =
        r === 0 ? 1 : Math.exp(-r * r * 0.28) * 0.72 + 0.28 * (Math.sin(1.9 * r) / (1.9 * r)) + arms;
    }
  }
  return { weighting: "robust(0)", size, cellArcsec: 2.7, pixels };
}

function fixtureMeasure(): Measure {
  return {
    name: "antenna",
    each: "antenna",
    title: "Counts and levels by antenna",
    columns: [
      { name: "antenna", unit: "", meaning: "antenna number" },
      { name: "flagged_fraction", unit: "", meaning: "share of its samples that is flagged" },
      { name: "noise_jy", unit: "Jy", meaning: "rms of one sample" },
    ],
    table: table({
      antenna: [1, 2, 3],
      flagged_fraction: [0.15234567891, 0.152, 0.16],
      noise_jy: [0.29, Number.NaN, 0.31],
    }),
  };
}

const judgement = (
  score: number,
  verdict: Judgement["verdict"],
  findings: readonly Finding[],
): Judgement => ({
  score,
  verdict,
  findings,
  taken: [
    { rule: "w-phase-at-field-edge", points: 30 },
    { rule: "phase-jump", points: 20 },
    { rule: "interference-persistent", points: 12.4 },
    { rule: "silent-antenna", points: 4 },
    { rule: "radial-gap", points: 2.1 },
  ],
  notJudged: [{ rule: "antenna-position", why: "no source dominates the field" }],
});

/** A dataset with several faults: a hold that flags do not mend. */
export function faultyCheck(dataset: Dataset = fixtureDataset()): Check {
  const findings = fixtureFindings();
  return {
    dataset,
    plan: fixturePlan(),
    survey: fixtureSurvey(dataset),
    events: [
      event({ scope: { ...EVERYTHING, antennas: [JUMP.antenna], time: [JUMP.from, JUMP.to] } }),
      event({
        kind: "persistent-line",
        cause: "channels",
        size: 14.8,
        unit: "sigma",
        scope: { ...EVERYTHING, subbands: [1], channels: [[20, 24]] },
      }),
    ],
    measures: new Map([["antenna", fixtureMeasure()]]),
    before: judgement(46.2, "hold", findings),
    after: judgement(67.9, "hold", findings),
    findings,
    flags: fixtureFlags(),
    sensitivityLossFraction: 0.131,
    doubts: [
      {
        selection: { ...EVERYTHING, baselines: [[2, 9]] },
        rule: "noisy",
        reason: "noise 2.1 times that of the others",
        why: "its weights say so already, and dropping it would cost more than it gives",
      },
    ],
    image: fixtureImage(),
    byField: null,
    beamPicture: fixtureBeam(),
    verdict: "hold",
    rulesFrom: [
      { id: "w-phase-at-field-edge", from: "ours" },
      { id: "phase-jump", from: "observatory-rules/phase-jump.yaml" },
    ],
    blindSpots: [
      "The longitude of the array is not in the file: u, v, w could not be compared with the sidereal time.",
      "Cross hands are absent: leakage and exchanged hands could not be seen.",
    ],
  };
}

/** Good data: ready, nothing suggested. */
export function cleanCheck(): Check {
  const check = faultyCheck();
  const ready = check.findings.filter((finding) => finding.verdict === "ready");
  const judged: Judgement = {
    score: 97.4,
    verdict: "ready",
    findings: ready,
    taken: [{ rule: "radial-gap", points: 2.6 }],
    notJudged: [],
  };
  return {
    ...check,
    events: [],
    before: judged,
    after: judged,
    findings: ready,
    flags: [],
    sensitivityLossFraction: 0,
    doubts: [],
    image: {
      ...check.image,
      weightings: check.image.weightings.map((result) => ({ ...result, after: null })),
      coverage: { before: check.image.coverage.before, after: null },
      limits: check.image.limits.slice(2),
    },
    verdict: "ready",
    rulesFrom: [{ id: "phase-jump", from: "ours" }],
    blindSpots: [],
  };
}

/** Names that would run, colour, turn around or widen what shows them. */
export const HOSTILE = {
  script: `<script>alert("x")</script><img src=x onerror=alert(1)>"'&`,
  escapes: "\u001b[31mred\u001b]0;title\u0007\u009b2Jcleared\r\n\tnext",
  bidi: "\u202egnissim\u2066\u200b\u200f",
  wide: "漢字の観測所".repeat(20),
  combining: `e${"\u0301\u0323\u0308".repeat(40)}`,
  endless: "x".repeat(400),
  pictures: "🛰️📡👩‍🔬".repeat(12),
} as const;

/** The faulty check with hostile text wherever a file, a rule or the user could have put some. */
export function hostileCheck(text: string): Check {
  const dataset = fixtureDataset();
  const named: Dataset = {
    ...dataset,
    name: text,
    files: [`/somewhere/${text}`],
    header: { OBSERVER: text },
    array: {
      ...dataset.array,
      name: text,
      antennas: dataset.array.antennas.map((antenna) => ({ ...antenna, name: `${text}${antenna.number}` })),
    },
    fields: dataset.fields.map((field) => ({ ...field, name: text })),
    unit: text,
    notes: [{ kind: "fault", code: "hostile", text }],
  };
  const check = faultyCheck(named);
  const findings = check.findings.map((finding) => ({
    ...finding,
    rule: text,
    title: text,
    measured: { ...finding.measured, unit: text },
    limits: { ...finding.limits, unit: text, from: text },
    consequence: { text },
    evidence: [text],
  }));
  return {
    ...check,
    plan: { ...check.plan, fieldOfView: { ...check.plan.fieldOfView, how: text } },
    events: check.events.map((one) => ({ ...one, unit: text, evidence: text })),
    findings,
    before: {
      ...check.before,
      findings,
      taken: [{ rule: text, points: 1 }],
      notJudged: [{ rule: text, why: text }],
    },
    flags: check.flags.map((flag) => ({ ...flag, rule: text, reason: text })),
    doubts: [{ selection: EVERYTHING, rule: text, reason: text, why: text }],
    image: {
      ...check.image,
      limits: check.image.limits.map((limit) => ({ ...limit, cause: text, text })),
      advice: [{ name: text, value: text, why: text }],
    },
    beamPicture: { ...fixtureBeam(), weighting: text },
    rulesFrom: [{ id: text, from: text }],
    blindSpots: [text],
  };
}

/** A dataset with nothing usable in it: no integration, no sample, every number unknown. */
export function emptyCheck(): Check {
  const check = faultyCheck();
  const unknown = <T extends object>(numbers: T): T =>
    Object.fromEntries(
      Object.entries(numbers).map(([key, value]) => [key, typeof value === "number" ? Number.NaN : value]),
    ) as T;
  const dataset: Dataset = { ...check.dataset, rows: 0, fields: [], setups: [], notes: [] };
  const empty = { antennas: [], fromTable: false } as const;
  const { tracks, totals } = check.survey;
  const nothing = Object.fromEntries(
    Object.entries(tracks).map(([key, value]) => [key, typeof value === "number" ? 0 : value.slice(0, 0)]),
  ) as unknown as Check["survey"]["tracks"];
  const judged: Judgement = { score: Number.NaN, verdict: "hold", findings: [], taken: [], notJudged: [] };
  return {
    ...check,
    dataset: { ...dataset, array: { ...dataset.array, ...empty } },
    survey: {
      ...check.survey,
      dataset: { ...dataset, array: { ...dataset.array, ...empty } },
      baselines: [],
      antennasWithData: [],
      tracks: nothing,
      times: new Float64Array(0),
      integration: Number.NaN,
      scans: [],
      totals: Object.fromEntries(Object.keys(totals).map((key) => [key, 0])) as unknown as typeof totals,
    },
    events: [],
    measures: new Map(),
    before: judged,
    after: judged,
    findings: [],
    flags: [],
    sensitivityLossFraction: 0,
    doubts: [],
    image: {
      weightings: check.image.weightings.map((result) => ({
        ...result,
        before: unknown(result.before),
        after: null,
      })),
      wTerm: { ...unknown(check.image.wTerm), known: false },
      smearing: unknown(check.image.smearing),
      coverage: { before: unknown(check.image.coverage.before), after: null },
      limits: [],
      advice: [],
    },
    beamPicture: null,
    blindSpots: [],
  };
}
