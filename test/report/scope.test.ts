import { describe, expect, it } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import { scopeWords } from "../../src/report/scope.ts";
import { fixtureDataset, START } from "./fixture-survey.ts";

const evening = [START, START + 0.05];
const words = scopeWords(fixtureDataset(), evening);
const minutes = (count: number) => START + count / 1440;

describe("scopeWords", () => {
  it("names antennas, clock times, sub-bands, channels and products", () => {
    const text = words.scope({
      antennas: [7],
      time: [minutes(45), minutes(72)],
      subbands: [1],
      channels: [[20, 24]],
      polarizations: ["RR"],
    });
    expect(text).toBe("antenna Q07, 21:45:00 to 22:12:00 UTC, sub-band 1, channels 20-24, RR");
  });

  it("takes null and absent for all of it", () => {
    expect(words.scope(EVERYTHING)).toBe("the whole dataset");
    expect(words.scope({})).toBe("the whole dataset");
  });

  it("says one time and one channel as one", () => {
    expect(words.scope({ time: [START, START], channels: [[3, 3]] })).toBe("at 21:00:00 UTC, channel 3");
  });

  it("counts what would make the sentence too long, but never one alone", () => {
    const antennas = [1, 2, 3, 4, 5];
    expect(words.scope({ antennas }, 3)).toBe("antennas Q01, Q02, Q03 and 2 more");
    expect(words.scope({ antennas }, 4)).toBe("antennas Q01, Q02, Q03, Q04 and Q05");
  });

  it("adds the date where the dataset has more than one", () => {
    const nights = scopeWords(fixtureDataset(), [START, START + 0.5]);
    expect(nights.scope({ time: [START, START + 0.25] })).toBe(
      "2032-03-14 21:00:00 to 2032-03-15 03:00:00 UTC",
    );
  });

  it("adds the number where a name is not an antenna's own, and uses it where there is no name", () => {
    const dataset = fixtureDataset();
    const antennas = dataset.array.antennas.map((antenna, i) => ({
      ...antenna,
      name: i < 2 ? "EA" : "\u202e ",
    }));
    const twins: Dataset = { ...dataset, array: { ...dataset.array, antennas } };
    const names = scopeWords(twins, evening);
    expect(names.antenna(1)).toBe("EA (1)");
    expect(names.antenna(3)).toBe("3");
    expect(names.scope({ antennas: [99] })).toBe("antenna 99");
  });

  it("says what selects nothing", () => {
    expect(words.scope({ antennas: [] })).toBe("no antenna");
  });
});
