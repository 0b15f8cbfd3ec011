import { describe, expect, it } from "vitest";
import { bestInterval } from "../../src/triage/causes/interval.ts";
import { CASES } from "./support/cases.ts";
import { play } from "./support/play.ts";

/** A seed of its own that nothing was tuned on; twenty of them are played by scoreboard/play.ts. */
const SEED = 900;

describe("triage of images made by direct sum", () => {
  it.each(CASES.map((game) => [game.name, game] as const))(
    "ranks the right cause first and names its samples: %s",
    async (_, game) => {
      const score = await play(game, SEED, "restored");
      expect(score).toMatchObject({ right: true });
      expect(score.located).not.toBe(false);
    },
  );

  it("does so for an image that is not deconvolved", async () => {
    const score = await play(CASES[0]!, SEED, "dirty");
    expect(score).toMatchObject({ right: true, located: true });
  });
});

describe("bestInterval", () => {
  const powers = (high: number) =>
    Float64Array.from({ length: 60 }, (_, i) => (i >= 20 && i <= 31 ? high : 1));

  it("finds the stretch that stands out, to the bin", () => {
    expect(bestInterval(powers(30))).toMatchObject({ first: 20, last: 31, mean: 30 });
  });

  it("bridges bins without data", () => {
    const gapped = powers(30);
    gapped[25] = Number.NaN;
    expect(bestInterval(gapped)).toMatchObject({ first: 20, last: 31 });
  });

  it("gives nothing where nothing is above the noise", () => {
    expect(bestInterval(new Float64Array(10).fill(Number.NaN))).toBeNull();
    expect(bestInterval(new Float64Array(10))).toBeNull();
  });
});
