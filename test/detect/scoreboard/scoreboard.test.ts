import { describe, expect, it } from "vitest";
import { CASES, REPORT_SEEDS, TUNING_SEEDS } from "./cases.ts";
import { playCase } from "./score.ts";

/** A few of the cases, each on a seed of its own that nothing was tuned on; the whole board is played by play.ts. */
const SEED = 900;

function named(name: string) {
  const game = CASES.find((one) => one.name === name);
  if (game === undefined) throw new Error(`no case "${name}"`);
  return game;
}

describe("detection on datasets it was not tuned on", () => {
  it.each([
    "point source, 9 antennas",
    "linear feeds, 4 products",
    "faint, S/N 0.1 a sample",
    "raw passband",
    "turbulent air",
    "transit of a bright source",
  ])("suggests hardly anything of good data: %s", async (name) => {
    const score = await playCase(named(name), SEED);
    expect(score.flagged).toBeLessThanOrEqual(0.0005);
  });

  it.each(["line, 6 sigma", "burst, 5 sigma", "drifting line, 8 sigma"])(
    "finds strong interference and little else: %s",
    async (name) => {
      const score = await playCase(named(name), SEED);
      expect(score.recall).toBeGreaterThanOrEqual(0.97);
      expect(score.precision).toBeGreaterThanOrEqual(0.95);
      expect([score.named, score.falseAlarms]).toEqual([1, 0]);
      expect(score.selections).toBeLessThanOrEqual(16);
    },
  );

  it("finds a burst of 2 sigma that all baselines see", async () => {
    const score = await playCase(named("burst, 2 sigma on all baselines"), SEED);
    expect(score.recall).toBeGreaterThanOrEqual(0.9);
  });

  it("tells when an antenna's phase jumped, and by how much", async () => {
    const score = await playCase(named("jump of 10 degrees"), SEED);
    expect([score.named, score.falseAlarms]).toEqual([1, 0]);
    expect(score.jumps[0]!.integrations).toBeLessThanOrEqual(1);
    expect(score.jumps[0]!.sigmas).toBeLessThanOrEqual(3);
  });

  it("unravels a silent antenna, bursts and a jump into exactly those three", async () => {
    const score = await playCase(named("silent antenna, bursts and a jump"), SEED);
    expect([score.named, score.falseAlarms, score.events.length]).toEqual([3, 0, 3]);
  });

  it("is reported on seeds that are not those of tuning", () => {
    expect(REPORT_SEEDS.filter((seed) => TUNING_SEEDS.includes(seed))).toEqual([]);
    expect(CASES.length).toBeGreaterThanOrEqual(25);
    expect(new Set(CASES.map(({ name }) => name)).size).toBe(CASES.length);
  });
});
