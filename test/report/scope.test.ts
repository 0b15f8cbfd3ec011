import { describe, expect, it } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import { scopeWords } from "../../src/report/scope.ts";
import { fixtureDataset, START } from "./fixture-survey.ts";
import { fixtureFlags } from "./fixtures.ts";

const words = scopeWords(fixtureDataset());
const minutes = (count: number) => START + count / 1440;

describe("scopeWords", () => {
  it("names antennas, sub-bands, channels, products and times", () => {
    const text = words.scope({
      antennas: [7],
      time: [minutes(45), minutes(72)],
      subbands: [1],
      channels: [[20, 24]],
      polarizations: ["RR"],
    });
    expect(text).toBe("antenna Q07, sub-band 1, channels 20 to 24, RR, 2032-03-14 21:45:00 to 22:12:00 UTC");
  });

  it("takes null and absent for all of it", () => {
    expect(words.scope(EVERYTHING)).toBe("the whole dataset");
    expect(words.scope({})).toBe("the whole dataset");
  });

  it("reads the selection of a flag, whatever else the flag holds", () => {
    expect(words.scope(fixtureFlags()[1]!)).toBe("sub-band 1, channels 20 to 24");
  });

  it("tells namesakes apart by number, and uses the number where there is no name", () => {
    const dataset = fixtureDataset();
    const antennas = dataset.array.antennas.map((antenna, i) => ({
      ...antenna,
      name: i < 2 ? "EA" : "\u202e ",
    }));
    const twins: Dataset = { ...dataset, array: { ...dataset.array, antennas } };
    const names = scopeWords(twins);
    expect(names.baseline(1, 3)).toBe("EA (1)-3");
  });

  it("takes from a reason the selection that stands beside it, and nothing else", () => {
    const scope = { antennas: [11] };
    expect(words.reason("Antenna Q11: no fringes.", scope)).toBe("no fringes.");
    expect(words.reason("Antenna Q12: no fringes.", scope)).toBe("Antenna Q12: no fringes.");
  });

  it("puts names for numbers into a sentence, and leaves every other number", () => {
    expect(
      words.named("Antenna 7 turns by 4 deg on 11 baselines; baseline 7-11, antennas 1, 7 and 11."),
    ).toBe("Antenna Q07 turns by 4 deg on 11 baselines; baseline Q07-Q11, antennas Q01, Q07 and Q11.");
    expect(words.named("antenna 7.5 m high, antenna Q07")).toBe("antenna 7.5 m high, antenna Q07");
  });
});
