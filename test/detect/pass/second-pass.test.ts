import { beforeAll, describe, expect, it } from "vitest";
import type { BlockRequest, Dataset } from "../../../src/dataset/dataset.ts";
import { wholeChoice } from "../../../src/detect/pass/choice.ts";
import { LENGTH_GROUPS } from "../../../src/detect/pass/combined.ts";
import { type SecondPass, secondPass } from "../../../src/detect/pass/second-pass.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import type { Survey } from "../../../src/measure/survey-result.ts";
import type { Simulated } from "../../../src/simulate/simulate.ts";
import { memoryDataset } from "../../dataset/memory-dataset.ts";
import { CLEAN, FAULTY, simulated, TRAPS, withFaults } from "../../support/scenarios.ts";

interface Looked {
  readonly survey: Survey;
  readonly pass: SecondPass;
}

async function look(dataset: Dataset): Promise<Looked> {
  const survey = await surveyDataset(dataset);
  return { survey, pass: await secondPass(survey, { choice: wholeChoice(survey) }) };
}

/** (steps x columns) scores added over all baselines and products. */
function combined({ pass }: Looked): Float32Array {
  const { steps, columns } = pass.combined;
  const scores = new Float32Array(steps * columns);
  pass.combined.fill(LENGTH_GROUPS, 0, columns, null, scores, new Uint8Array(steps * columns));
  return scores;
}

function inBlocksOf(dataset: Dataset, blockRows: number): Dataset {
  return { ...dataset, blocks: (request: BlockRequest) => dataset.blocks({ ...request, blockRows }) };
}

describe("the second pass over good data", () => {
  let clean: Looked;
  beforeAll(async () => {
    clean = await look(CLEAN.circular().dataset);
  });

  it("gives noise the scores of noise, on each baseline and added over all", () => {
    const { marks } = clean.pass;
    const usable = marks!.usable.total();
    expect(usable).toBe(clean.survey.totals.usable);
    // Standard error of the share 0.0005.
    expect(Math.abs(marks!.elevated.total() / usable - 0.05)).toBeLessThan(0.003);
    expect(marks!.bright.total()).toBe(0);
    expect(marks!.outlying.total() / usable).toBeLessThan(1e-4);
    const scores = combined(clean);
    const mean = scores.reduce((sum, x) => sum + x, 0) / scores.length;
    const deviation = Math.sqrt(scores.reduce((sum, x) => sum + (x - mean) ** 2, 0) / scores.length);
    expect(Math.abs(mean)).toBeLessThan(0.2);
    expect(Math.abs(deviation - 1)).toBeLessThan(0.05);
    expect(Math.max(...scores)).toBeLessThan(5);
  });

  it("is the same whatever the blocks the rows come in", async () => {
    const again = await look(inBlocksOf(CLEAN.circular().dataset, 37));
    expect(combined(again)).toEqual(combined(clean));
    expect(again.pass.marks!.elevated.bits).toEqual(clean.pass.marks!.elevated.bits);
    expect(again.pass.clean.real).toEqual(clean.pass.clean.real);
  });

  it("is the same whatever the order of the rows", async () => {
    const again = await look(CLEAN.baselineOrder().dataset);
    expect(combined(again)).toEqual(combined(clean));
    expect(again.pass.marks!.elevated.bits).toEqual(clean.pass.marks!.elevated.bits);
  });

  it("is the same whichever antenna of a baseline comes first", async () => {
    const again = await look(FAULTY.swappedOrder().dataset);
    // Conjugation changes the last bits of sums: a sample on the brink may move.
    const differing = combined(again).filter((score, i) => Math.abs(score - combined(clean)[i]!) > 0.05);
    expect(differing.length).toBeLessThan(20);
  });

  it("counts its way through the rows", async () => {
    const told: number[] = [];
    await secondPass(clean.survey, {
      choice: wholeChoice(clean.survey),
      onProgress: (done, rows) => told.push(done / rows),
    });
    expect(told.at(-1)).toBe(1);
    expect([...told].sort((a, b) => a - b)).toEqual(told);
  });

  const traps = Object.entries(TRAPS).filter(([name]) => name !== "beating");
  it.each(traps)("sees nothing in the trap %s", async (_, make: () => Simulated) => {
    const looked = await look(make().dataset);
    const { marks } = looked.pass;
    const usable = marks!.usable.total();
    expect(Math.max(...combined(looked))).toBeLessThan(7);
    expect(marks!.elevated.total() / usable).toBeLessThan(0.06);
    expect(marks!.bright.total() / usable).toBeLessThan(0.002);
  });
});

describe("the second pass over interference", () => {
  it("finds a line of 2 sigma on all baselines together that no baseline shows alone", async () => {
    const { dataset } = withFaults([{ kind: "persistent-line", channels: "5", amplitude: "2 sigma" }]);
    const looked = await look(dataset);
    const { steps, columns } = looked.pass.combined;
    const scores = combined(looked);
    const inside = Array.from({ length: steps }, (_, step) => scores[step * columns + 5]!);
    expect(inside.filter((score) => score > 5).length / steps).toBeGreaterThan(0.9);
    const outside = scores.filter((_, i) => i % columns !== 5);
    expect(Math.max(...outside)).toBeLessThan(5);
    expect(looked.pass.marks!.bright.total() / looked.survey.totals.usable).toBeLessThan(1e-4);
  });

  it("marks a burst of 8 sigma on each baseline", async () => {
    const { dataset, truth } = FAULTY.burst();
    const { pass, survey } = await look(dataset);
    let [both, touched, marked] = [0, 0, 0];
    let row = 0;
    const { rowSamples } = pass.marks!.outlying;
    // Rows come by time, then baseline; cells lie by baseline, then time.
    const times = survey.times.length;
    const baselines = survey.baselines.length;
    for await (const block of dataset.blocks({ want: "rows" })) {
      const mask = truth.mask(block);
      for (let r = 0; r < block.rows; r++, row++) {
        const cell = (row % baselines) * times + Math.floor(row / baselines);
        expect(survey.tracks.time[cell]).toBe(block.time[r]);
        for (let sample = 0; sample < rowSamples; sample++) {
          const true_ = mask[r * rowSamples + sample] === 1;
          const found = pass.marks!.outlying.has(cell, sample);
          if (true_) touched += 1;
          if (found) marked += 1;
          if (true_ && found) both += 1;
        }
      }
    }
    expect(both / touched).toBeGreaterThan(0.97);
    expect(both / marked).toBeGreaterThan(0.97);
  });

  it("keeps interference out of the clean tracks", async () => {
    const spoilt = await look(FAULTY.burst().dataset);
    const good = await look(CLEAN.circular().dataset);
    const error = (real: Float32Array, imag: Float32Array) => {
      let sum = 0;
      for (let i = 0; i < real.length; i++) {
        sum += (real[i]! - good.survey.tracks.real[i]!) ** 2 + (imag[i]! - good.survey.tracks.imag[i]!) ** 2;
      }
      return Math.sqrt(sum / real.length);
    };
    const { tracks } = spoilt.survey;
    const { clean } = spoilt.pass;
    // What is left is the noise of the channels that had to be left out.
    expect(error(clean.real, clean.imag)).toBeLessThan(0.35 * error(tracks.real, tracks.imag));
  });

  it("tells the noise of each cell", async () => {
    const { survey, pass } = await look(FAULTY.noisyAntenna().dataset);
    const products = survey.dataset.shape.polarizations;
    const noisy = (cell: number) => {
      const { antenna1, antenna2 } = survey.baselines[survey.tracks.baseline[cell]!]!;
      return antenna1 === 4 || antenna2 === 4;
    };
    // 400 Jy over sqrt(2 x 500 kHz x 10 s), and three times that.
    const expected = 400 / Math.sqrt(2 * 500e3 * 10);
    for (const [wanted, sigma] of [
      [false, expected],
      [true, 3 * expected],
    ] as const) {
      let sum = 0;
      let count = 0;
      for (let cell = 0; cell < survey.tracks.cells; cell++) {
        if (noisy(cell) !== wanted) continue;
        sum += Math.sqrt(pass.clean.noise[cell * products]! / 2);
        count += 1;
      }
      expect(Math.abs(sum / count / sigma - 1)).toBeLessThan(0.05);
    }
  });
});

describe("the second pass over little or nothing", () => {
  it.each([
    ["no rows at all", 0, 16, 1],
    ["one row", 1, 16, 1],
    ["three rows of one channel", 3, 1, 1],
    ["everything flagged", 40, 16, -1],
  ])("gets through %s", async (_, rows, channels, weight) => {
    const dataset = memoryDataset(
      { subbands: 1, channels, polarizations: ["RR"] },
      Array.from({ length: rows }, (_, i) => ({
        time: 60000 + i / 8640,
        antenna1: 1,
        antenna2: 2,
        weight: new Array<number>(channels).fill(weight),
      })),
    );
    const { pass } = await look(dataset);
    expect(pass.marks!.bright.total() + pass.marks!.outlying.total()).toBe(0);
  });

  it("sees a lone bright sample in a dataset of one channel", async () => {
    const { dataset } = simulated({
      name: "one channel",
      frequency: { channels: 1, width: "8MHz" },
      faults: [{ kind: "lone-samples", share: 0.002, amplitude: "40 sigma" }],
    });
    const { pass, survey } = await look(dataset);
    const bright = pass.marks!.bright.total();
    expect(bright).toBeGreaterThan(0.0008 * survey.totals.usable);
    expect(bright).toBeLessThan(0.003 * survey.totals.usable);
  });
});
