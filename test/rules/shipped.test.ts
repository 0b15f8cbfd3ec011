/** Every rule that we ship, over measures that have every column it could ask for. */
import { readdir } from "node:fs/promises";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { EVENT_KINDS } from "../../src/detect/event.ts";
import { EVENT_FORM, INTERFERENCE_FORM } from "../../src/detect/event-table.ts";
import { IMAGING_MEASURES } from "../../src/imaging/measure-columns.ts";
import * as survey from "../../src/measure/forms.ts";
import type { Column, Measure, RowKind } from "../../src/measure/table.ts";
import { FAMILIES } from "../../src/rules/finding.ts";
import { judge } from "../../src/rules/judge.ts";
import { loadRules } from "../../src/rules/load.ts";
import { measure, measures, PLAN } from "./support.ts";

const FOLDER = fileURLToPath(new URL("../../rules", import.meta.url));
const OURS = await loadRules();

interface Form {
  readonly name: string;
  readonly each: RowKind;
  readonly columns: readonly Column[];
}

const FORMS: readonly Form[] = [
  ...Object.values(survey),
  ...IMAGING_MEASURES,
  { name: "event", each: "event", columns: EVENT_FORM },
  { name: "interference", each: "dataset", columns: INTERFERENCE_FORM },
];

/** Columns that hold words. */
const WORDS: ReadonlySet<string> = new Set([
  "polarization",
  "name",
  "text",
  "evidence",
  "repair",
  "unit",
  "fault_text",
]);

/** Every measure with `rows` rows of what `fill` gives a numeric column; events of every kind. */
function filled(rows: number, fill: (column: string, row: number) => unknown): Map<string, Measure> {
  return new Map(
    FORMS.map(({ name, each, columns }) => {
      const count =
        name === "event" ? rows * EVENT_KINDS.length : each === "dataset" ? Math.min(1, rows) : rows;
      const cell = (column: string, row: number): unknown => {
        if (name === "event" && column === "kind") return EVENT_KINDS[row % EVENT_KINDS.length];
        if (name === "radial_gap" && column === "kind") return "hole";
        if (name === "limit" && column === "event") return row;
        return WORDS.has(column) ? null : fill(column, row);
      };
      const data = Object.fromEntries(
        columns.map((column) => [
          column.name,
          Array.from({ length: count }, (_, row) => cell(column.name, row)),
        ]),
      );
      return [name, measure(name, each, data)];
    }),
  );
}

describe("the rules we ship", () => {
  it("are one a file, named by its id, in the folder of its family", async () => {
    const files = (await readdir(FOLDER, { recursive: true }))
      .filter((path) => path.endsWith(".yaml"))
      .sort();
    expect(files).toEqual(OURS.rules.map(({ family, id }) => join(family, `${id}.yaml`)).sort());
  });

  it("serve every family", () => {
    expect(FAMILIES.filter((family) => !OURS.rules.some((rule) => rule.family === family))).toEqual([]);
  });

  it("have one for every kind of event, by its name", () => {
    const ids = new Set(OURS.rules.map(({ id }) => id));
    expect(EVENT_KINDS.filter((kind) => !ids.has(kind))).toEqual([]);
  });

  it.each(OURS.rules.map((rule) => [rule.id, rule] as const))(
    "%s states a number in its consequence",
    (_, rule) => {
      const numbers = rule.consequence.parts.filter((part) => part.kind !== "words");
      expect(numbers.length).toBeGreaterThan(0);
      expect(rule.question).toMatch(/\?$/);
      expect(rule.consequence.text.trim()).toMatch(/\.$/);
      expect(rule.title).not.toMatch(/\.$/);
    },
  );

  it("ask only for measures and columns that there are, whatever the numbers", () => {
    const nasty = [0, 1, -1, 0.5, 1e-300, 1e300, Number.POSITIVE_INFINITY];
    for (const value of nasty) {
      const { notJudged, score } = judge(
        OURS,
        filled(3, () => value),
        PLAN,
      );
      expect(notJudged.filter(({ why }) => why.includes("measure"))).toEqual([]);
      expect(score).toBeGreaterThanOrEqual(0);
      expect(score).toBeLessThanOrEqual(100);
    }
  });

  it("never pass a dataset of unknown numbers for good without saying so", () => {
    const { findings, notJudged } = judge(
      OURS,
      filled(2, () => Number.NaN),
      PLAN,
    );
    expect(findings).toEqual([]);
    const silent = OURS.rules.filter(({ id }) => !notJudged.some(({ rule }) => rule === id));
    // These apply to some plans or datasets only, and this one is not of them.
    expect(silent.map(({ id }) => id).sort()).toEqual(
      OURS.rules
        .filter(({ where }) => where !== null && isOff(where.text))
        .map(({ id }) => id)
        .sort(),
    );
  });

  /** Conditions that do not hold for the plan of these tests, or that ask what is unknown. */
  function isOff(where: string): boolean {
    return /^plan\.corrects_w$|&& plan\.corrects_w|plan\.(?:target_rms|expected_sefd)|is_finite/.test(where);
  }

  it("find nothing where there are no measures, and say that they could not judge", () => {
    const { findings, notJudged, score } = judge(OURS, measures(), PLAN);
    expect(findings).toEqual([]);
    expect(score).toBe(100);
    expect(notJudged.map(({ rule }) => rule).sort()).toEqual(OURS.rules.map(({ id }) => id).sort());
  });

  it("judge events and gaps that did not happen as none, and tables without rows as not judged", () => {
    const { findings, notJudged } = judge(
      OURS,
      filled(0, () => 0),
      PLAN,
    );
    expect(findings).toEqual([]);
    const judged = OURS.rules.filter(({ id }) => !notJudged.some(({ rule }) => rule === id));
    expect(new Set(judged.map((rule) => rule.measure))).toEqual(
      new Set(["event", "radial_gap", "azimuthal_gap"]),
    );
  });

  it("give findings that are whole, whatever the numbers", () => {
    const number = fc.oneof(
      fc.double({ min: 0, max: 1, noNaN: true }),
      fc.double({ min: -1e6, max: 1e6, noNaN: true }),
      fc.constantFrom(0, Number.NaN, Number.POSITIVE_INFINITY),
    );
    fc.assert(
      fc.property(fc.array(number, { minLength: 7, maxLength: 7 }), (numbers) => {
        let at = 0;
        const { findings, score, taken } = judge(
          OURS,
          filled(2, () => numbers[at++ % 7]),
          PLAN,
        );
        expect(score >= 0 && score <= 100).toBe(true);
        for (const finding of findings) {
          expect(finding.severity > 0 && finding.severity <= 1).toBe(true);
          expect(finding.verdict).toBe(finding.severity === 1 ? "hold" : "caution");
          expect(finding.consequence.text).not.toMatch(/NaN|undefined|\{|\}/);
          expect(finding.evidence.length).toBeGreaterThan(0);
          expect(finding.limits.from).not.toBe("");
        }
        expect(taken.every(({ points }) => points > 0 && points <= 100)).toBe(true);
      }),
      { numRuns: 60 },
    );
  });
});
