import { describe, expect, it } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { MOST_BASELINES } from "../../src/measure/even-choice.ts";
import { finishSurvey } from "../../src/measure/finish-survey.ts";
import { PairSet } from "../../src/measure/pair-set.ts";
import { StateReader } from "../../src/measure/state/reader.ts";
import { joinParts, surveyPart } from "../../src/measure/survey.ts";
import { SurveyPart } from "../../src/measure/survey-part.ts";
import { baselinesMet, type Survey } from "../../src/measure/survey-result.ts";
import { largeArray } from "../support/large-array.ts";
import { surveyBits } from "./survey-bits.ts";

const ANTENNAS = 366;
const BASELINES = (ANTENNAS * (ANTENNAS - 1)) / 2;
const dataset = largeArray({ antennas: ANTENNAS, integrations: 1, channels: 1 });

/** Few bytes make the tracks choose fewer baselines than the tables would hold. */
const LITTLE = 4e6;

const bits = (survey: Survey) => [surveyBits(survey), survey.others];
const surveyOf = async (source: Dataset, memory?: number) =>
  finishSurvey(await surveyPart(source, memory === undefined ? {} : { memory }));

const whole = await surveyOf(dataset);

describe("an array of more baselines than are looked at one by one", () => {
  it("looks at an even choice, and counts all", () => {
    const survey = whole;
    expect(survey.baselines.length).toBeLessThanOrEqual(MOST_BASELINES);
    expect(survey.baselines.length).toBeGreaterThan(0.45 * BASELINES);
    expect(baselinesMet(survey)).toBe(BASELINES);
    expect(survey.tracks.cells).toBe(survey.baselines.length);
    expect(survey.totals).toMatchObject({ rows: BASELINES, samples: BASELINES, usable: BASELINES });
    expect(survey.totals.outOfOrderRows).toBe(0);
    expect(survey.antennasWithData).toHaveLength(ANTENNAS);
    const { table } = survey.measures.get("antenna")!;
    for (const name of ["baselines", "samples", "usable"]) {
      expect(new Set(table.array(name) as number[])).toEqual(new Set([ANTENNAS - 1]));
    }
    expect(survey.measures.get("baseline")!.title).toContain(`of ${BASELINES}`);
    // Every weight is 1.
    const own = survey.tracks.weight.reduce((sum, weight) => sum + weight, 0);
    expect(own + survey.others!.rows[0]!.weight[0]!).toBe(BASELINES);
  });

  it.each([
    ["as the tables hold", undefined],
    ["as little memory holds", LITTLE],
  ])("is the same to the last bit however the rows are shared out: %s", async (_, memory) => {
    const expected = memory === undefined ? whole : await surveyOf(dataset, memory);
    const options = memory === undefined ? {} : { memory };
    const cuts = [0, 9_000, 60_000, dataset.rows];
    const parts = await Promise.all(
      cuts.slice(1).map(async (end, i) => {
        const part = await surveyPart(dataset, {
          rows: [cuts[i]!, end],
          blockRows: 700 + 500 * i,
          ...options,
        });
        return SurveyPart.from(new StateReader(part.state()), dataset, memory);
      }),
    );
    const [a, b, c] = parts as [SurveyPart, SurveyPart, SurveyPart];
    expect(bits(finishSurvey(joinParts([c, a, b])))).toEqual(bits(expected));
    if (memory === LITTLE) expect(expected.baselines.length).toBeLessThan(0.3 * BASELINES);
  });

  it("is looked at whole where the table names more antennas than there are in the data", async () => {
    const few = largeArray({ antennas: 20, integrations: 350, channels: 1 });
    const survey = await surveyOf({ ...few, array: dataset.array });
    expect(survey.baselines).toHaveLength(190);
    expect(survey.others).toBeUndefined();
  });
});

describe("PairSet", () => {
  it("holds each pair once, damaged numbers too", () => {
    const pairs = [
      [1, 2],
      [1, 513],
      [7, 65_535],
      [-3, 4],
      [2, 2 ** 31 - 1],
      [-9, -2],
    ] as const;
    const set = new PairSet();
    for (const [low, high] of [...pairs, ...pairs]) set.add(low, high);
    const found: string[] = [];
    set.each((low, high) => found.push(`${low} ${high}`));
    expect(set.size).toBe(pairs.length);
    expect(found.sort()).toEqual(pairs.map((pair) => pair.join(" ")).sort());
    const copy = new PairSet();
    copy.restore(new StateReader(set.state()));
    copy.merge(set);
    expect(copy.size).toBe(pairs.length);
  });
});
