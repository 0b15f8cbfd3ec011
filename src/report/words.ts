/** What verdicts, findings and suggestions are called and what they ask of the reader: one wording for every report. */
import type { Finding, Suggestion, Verdict } from "../rules/finding.ts";
import { formatQuantity } from "../rules/quantity.ts";
import type { Check } from "./report.ts";

export const VERDICT_NAME: Readonly<Record<Verdict, string>> = {
  ready: "Ready",
  caution: "Caution",
  hold: "Hold",
};

/** What the verdict on a dataset tells its reader to do. */
export function verdictAdvice({ verdict, flags }: Pick<Check, "verdict" | "flags">): string {
  const some = flags.length > 0;
  switch (verdict) {
    case "ready":
      return "Image it as it is.";
    case "caution":
      return some
        ? "Image it after the suggested flags, or within the limits stated."
        : "Image it within the limits stated.";
    case "hold":
      return (
        `Do not image it yet: ${some ? "even after the suggested flags " : ""}the planned image is out of reach, ` +
        "or something is wrong that flags do not mend."
      );
  }
}

export const PROPOSALS =
  "The flags are proposals for a person to accept or refuse. Nothing has been flagged and the dataset has not been changed.";

/** What the report's owner does with a finding that flags do not settle. */
const TO_DO: Readonly<Record<Suggestion, string>> = {
  flag: "Look at these samples; no flag is proposed for them.",
  calibrate: "Calibrate it out: good data are worth more than flagged data.",
  "correct-w": "Have the imager correct the w term, or plan a smaller field.",
  "narrow-field": "Plan a smaller field.",
  "more-data":
    "Observe more, or plan an image that does not need what is missing: no flag and no calibration fills it.",
  "average-less": "Use data averaged less in frequency and time, if they are still there.",
  "fix-metadata": "Mend the tables or the header of the file, then check it again.",
  reweight: "Compute the weights anew from the scatter of the data before imaging.",
  none: "Nothing to do; know it when you judge the image.",
};

export function toDo(finding: Finding): string {
  const { flags, suggests } = finding;
  if (flags.length === 0) return TO_DO[suggests];
  const named =
    flags.length <= 6 ? flags.join(", ") : `${flags.slice(0, 5).join(", ")} and ${flags.length - 5} more`;
  const word = flags.length === 1 ? "flag" : "flags";
  const mended = finding.mendedByFlags ? ` ${mendedText(finding)}` : "";
  if (suggests === "flag") return `Accept suggested ${word} ${named}.${mended}`;
  const first = suggests === "none" ? "" : `${TO_DO[suggests]} Until then, `;
  return upperFirst(`${first}suggested ${word} ${named} would remove it.${mended}`);
}

/** A finding that flags mend is shown as a caution, though its value may stand far beyond the hold limit. */
function mendedText({ severity }: Finding): string {
  return severity >= 1
    ? "As the data are it is past its hold limit; with the suggested flags it is not."
    : "With the suggested flags it is within its limits.";
}

/** `42.1 deg`, and the limits it is held against: `caution above 10 deg, hold above 30 deg`. */
export function limitsText(finding: Finding): { measured: string; limits: string } {
  const { caution, hold, unit } = finding.limits;
  const side = hold >= caution ? "above" : "below";
  return {
    measured: formatQuantity(finding.measured.value, finding.measured.unit),
    limits: `caution ${side} ${formatQuantity(caution, unit)}, hold ${side} ${formatQuantity(hold, unit)}`,
  };
}

/** `41`, rounded here and nowhere else. */
export function scoreText(score: number): string {
  return Number.isFinite(score) ? String(Math.round(Math.min(100, Math.max(0, score)))) : "unknown";
}

/** `Score 41 of 100; 78 with the suggested flags.` */
export function scoreSentence(check: Check): string {
  const before = `Score ${scoreText(check.before.score)} of 100`;
  return check.flags.length === 0
    ? `${before}; no flags are suggested.`
    : `${before}; ${scoreText(check.after.score)} of 100 with the suggested flags applied.`;
}

/** `1 hold, 2 cautions` */
export function findingCounts(findings: readonly Finding[]): string {
  const count = (verdict: Verdict) => findings.filter((finding) => finding.verdict === verdict).length;
  const holds = count("hold");
  const cautions = count("caution");
  const parts: string[] = [];
  if (holds > 0) parts.push(`${holds} ${holds === 1 ? "hold" : "holds"}`);
  if (cautions > 0) parts.push(`${cautions} ${cautions === 1 ? "caution" : "cautions"}`);
  return parts.length === 0 ? "nothing that cautions or holds" : parts.join(", ");
}

/** Points that a rule took: whole ones, below one a digit. */
export function pointsText(points: number): string {
  return points < 0.95 ? String(Number(points.toPrecision(1))) : String(Math.round(points));
}

/** Rules that could not be judged, those with one reason together. */
export function notJudgedTexts(notJudged: Check["before"]["notJudged"]): { rules: string; why: string }[] {
  const byReason = new Map<string, string[]>();
  for (const { rule, why } of notJudged) {
    const reason = why.trim().replace(/\.$/, "");
    byReason.set(reason, [...(byReason.get(reason) ?? []), rule]);
  }
  return [...byReason].map(([why, rules]) => ({
    rules: `${rules.length === 1 ? "Rule" : "Rules"} ${rules.join(", ")}`,
    why,
  }));
}

/** A clause as a sentence: a capital at its start, a full stop at its end. */
export function sentence(text: string): string {
  const trimmed = text.trim();
  const stopped = trimmed === "" || /[.!?]$/.test(trimmed) ? trimmed : `${trimmed}.`;
  return upperFirst(stopped);
}

export function upperFirst(text: string): string {
  return text.charAt(0).toUpperCase() + text.slice(1);
}

/** `and 1 more rule` */
export function moreRules(count: number): string {
  return `and ${count} more ${count === 1 ? "rule" : "rules"}`;
}
