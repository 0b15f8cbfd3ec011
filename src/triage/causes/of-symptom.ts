/** Causes of a described symptom, by what the check found in the data. */
import { EVERYTHING, type Selection } from "../../dataset/selection.ts";
import type { FlagEntry } from "../../flags/entry.ts";
import type { Check } from "../../report/report.ts";
import type { ScopeWords } from "../../report/scope.ts";
import { sentence, toDo } from "../../report/words.ts";
import type { Finding } from "../../rules/finding.ts";
import type { SymptomWord } from "../symptoms/symptom.ts";
import type { TriageCause } from "./cause.ts";

/**
 * How directly a rule's finding makes a symptom, 0..1: 1 its very look, less where it mostly looks otherwise.
 * Common practice, no source.
 */
const MAKES: Readonly<Record<SymptomWord, Readonly<Record<string, number>>>> = {
  stripes: {
    closure: 1,
    "calibrator-baseline": 1,
    burst: 0.9,
    "persistent-line": 0.8,
    "drifting-line": 0.8,
    "lone-samples": 0.7,
    "weight-mismatch": 0.7,
    "not-finite": 0.6,
    "gain-step": 0.5,
    "phase-jump": 0.5,
    "reversed-baselines": 0.9,
  },
  rings: {
    "w-at-field-edge": 1,
    "w-long-baselines": 0.9,
    "w-planes": 0.5,
    "gain-step": 0.7,
    "phase-jump": 0.7,
    "weak-antenna": 0.6,
    "silent-antenna": 0.6,
    "phase-noise": 0.6,
    "radial-gap": 0.6,
    sidelobes: 0.6,
    "antenna-position": 0.8,
    "antenna-position-by-phase": 0.8,
    "uvw-against-tables": 0.9,
    "uvw-scale": 0.9,
  },
  "radial-blur": { "bandwidth-smearing": 1, "w-at-field-edge": 0.5, "delay-slope": 0.5, "uvw-scale": 0.4 },
  "tangential-blur": { "time-smearing": 1, "w-at-field-edge": 0.4, "uvw-turned": 0.6 },
  bowl: { "missing-large-scales": 1, "radial-gap": 0.5, "few-cells-filled": 0.4, shadowing: 0.4 },
  ghosts: {
    "phase-jump": 1,
    "half-turn": 1,
    "exchanged-hands": 0.6,
    "gain-step": 0.8,
    closure: 0.6,
    "antenna-position": 0.7,
    "antenna-position-by-phase": 0.7,
    "reversed-baselines": 0.9,
    "uvw-turned": 0.7,
    "delay-slope": 0.6,
  },
  noise: {
    "persistent-line": 1,
    burst: 1,
    "drifting-line": 1,
    "interference-share": 1,
    "lone-samples": 0.8,
    noisy: 1,
    "phase-noise": 0.7,
    "weight-mismatch": 0.9,
    "noise-above-target": 0.8,
    "sensitivity-below-expected": 0.8,
    "sensitivity-lost": 0.7,
    "stuck-zeros": 0.6,
  },
};

const TESTS: Readonly<Record<SymptomWord, string>> = {
  stripes:
    "Make the image without these samples: the stripes must go. Their spacing is one over the spacing of the baseline at fault.",
  rings:
    "Make a small image with the phase centre on the source: rings of the w term go, those of an antenna stay.",
  "radial-blur":
    "Compare the widths of sources near and far, along the direction to the centre and across it.",
  "tangential-blur":
    "Compare the widths of sources near and far, around the centre and along the direction to it.",
  bowl: "Leave out the shortest of the spacings that are there: the hollow must deepen.",
  ghosts: "Make the image of the time or the hands without the fault alone: the ghosts must go.",
  noise: "Make the image without these samples: its noise must come down to what the check predicts.",
};

/** Findings that go no further than this below their caution limit are none. */
const LEAST_SEVERITY = 0;

export function causesOfSymptom(
  symptom: SymptomWord,
  check: Check,
  words: ScopeWords,
): { causes: TriageCause[]; flags: FlagEntry[] } {
  const makes = MAKES[symptom];
  const ranked = check.findings
    .filter(
      ({ rule, severity, verdict }) => rule in makes && (severity > LEAST_SEVERITY || verdict !== "ready"),
    )
    .sort((a, b) => weightOf(b, makes) - weightOf(a, makes));
  const used = new Set(ranked.flatMap(({ flags }) => flags));
  return {
    causes: ranked.map((finding) => causeOf(finding, symptom, words)),
    flags: check.flags.filter(({ id }) => used.has(id)),
  };
}

function weightOf({ rule, severity }: Finding, makes: Readonly<Record<string, number>>): number {
  return severity * makes[rule]!;
}

function causeOf(finding: Finding, symptom: SymptomWord, words: ScopeWords): TriageCause {
  const scope: Selection = { ...EVERYTHING, ...finding.scope };
  const narrow = Object.values(scope).some((part) => part !== null);
  return {
    kind: finding.rule,
    title: finding.title,
    where: narrow ? words.scope(scope) : "",
    scope: narrow ? scope : null,
    share: Number.NaN,
    severity: finding.severity,
    evidence: [finding.consequence.text, ...finding.evidence].map((text) => sentence(words.named(text))),
    rules: [finding.rule],
    test: TESTS[symptom],
    cure: toDo(finding),
    flags: finding.flags,
  };
}
