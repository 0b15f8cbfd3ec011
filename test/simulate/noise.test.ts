import { describe, expect, it } from "vitest";
import { readAll, sameBits } from "../support/read-all.ts";
import { type Changes, simulated } from "../support/scenarios.ts";

/** rms of the real parts of one polarization, and how many samples it stands on. */
async function rmsOf(changes: Changes, polarization = 0): Promise<{ rms: number; error: number }> {
  const { dataset } = simulated({ sky: [], ...changes });
  const { real } = await readAll(dataset);
  let [sum, count] = [0, 0];
  for (let i = polarization; i < real.length; i += dataset.shape.polarizations) {
    sum += real[i]! ** 2;
    count += 1;
  }
  const rms = Math.sqrt(sum / count);
  return { rms, error: rms / Math.sqrt(2 * count) };
}

const SIGMA = 400 / Math.sqrt(2 * 500e3 * 10);

describe("thermal noise", () => {
  it("is 1/sqrt 2 of a product's in each Stokes parameter, the mean of two", async () => {
    for (const polarization of [0, 1, 2, 3]) {
      const { rms, error } = await rmsOf({ polarizations: ["I", "Q", "U", "V"] }, polarization);
      expect(Math.abs(rms - SIGMA * Math.SQRT1_2)).toBeLessThan(5 * error);
    }
  });

  it("scales with `noise`, and the weights do not", async () => {
    const { rms, error } = await rmsOf({ noise: 2 });
    expect(Math.abs(rms - 2 * SIGMA)).toBeLessThan(5 * error);
    const { dataset } = simulated({ noise: 2 });
    const { weight } = await readAll(dataset, { want: "weights" });
    expect(weight[0]).toBe(Math.fround(1 / SIGMA ** 2));
  });

  it("follows a passband, as its weights do", async () => {
    const { dataset } = simulated({
      sky: [],
      frequency: { channels: 8 },
      gains: { amplitude: 0.2, bandpass: { edge: 0.3, edge_level: 0.2 } },
    });
    const { real, weight } = await readAll(dataset);
    const inSigmas = real.reduce((sum, re, i) => sum + re * re * weight[i]!, 0) / real.length;
    expect(Math.abs(inSigmas - 1)).toBeLessThan(5 * Math.sqrt(2 / real.length));
    const spread = Math.max(...weight.slice(0, 16)) / Math.min(...weight.slice(0, 16));
    expect(spread).toBeGreaterThan(4);
  });

  it("of unity weights and scaled weights is the same noise", async () => {
    const plain = await readAll(simulated().dataset);
    const unity = await readAll(simulated({ weights: "unity" }).dataset);
    const scaled = await readAll(simulated({ weights: 0.5 }).dataset);
    expect(sameBits(unity.real, plain.real)).toBe(true);
    expect(new Set(unity.weight)).toEqual(new Set([1]));
    expect(scaled.weight[0]).toBe(plain.weight[0]! / 2);
  });
});

describe("the atmosphere", () => {
  /** Phase of an antenna pair's rows in time, radians, unwrapped. */
  async function phases(changes: Changes, antenna1: number, antenna2: number): Promise<number[]> {
    const { dataset } = simulated({ noise: 0, ...changes });
    const block = await readAll(dataset);
    const perRow = block.real.length / block.rows;
    const found: number[] = [];
    for (let row = 0; row < block.rows; row++) {
      if (block.antenna1[row] !== antenna1 || block.antenna2[row] !== antenna2) continue;
      const phase = Math.atan2(block.imag[row * perRow]!, block.real[row * perRow]!);
      const last = found.at(-1) ?? phase;
      found.push(phase - 2 * Math.PI * Math.round((phase - last) / (2 * Math.PI)));
    }
    return found;
  }

  it("walks as far in a minute as the scenario says", async () => {
    let [sum, count] = [0, 0];
    for (let seed = 1; seed <= 20; seed++) {
      const series = await phases(
        { seed, atmosphere: { kind: "walk", rms_per_minute: "10deg" }, frequency: { channels: 1 } },
        1,
        2,
      );
      for (let t = 6; t < series.length; t += 6) {
        sum += (series[t]! - series[t - 6]!) ** 2;
        count += 1;
      }
    }
    // Two antennas walk on their own: sqrt 2 of one's.
    const rms = (Math.sqrt(sum / count) * 180) / Math.PI;
    expect(Math.abs(rms - 10 * Math.SQRT2)).toBeLessThan((5 * rms) / Math.sqrt(2 * count));
  });

  it("wanders less on short baselines, by Kolmogorov's 5/6 power", async () => {
    const square = async (kilometres: number) => {
      let sum = 0;
      const seeds = 60;
      for (let seed = 1; seed <= seeds; seed++) {
        const [first] = await phases(
          {
            seed,
            array: {
              layout: {
                kind: "positions",
                positions: [
                  ["0m", "0m", "0m"],
                  [`${kilometres}km`, "0m", "0m"],
                  ["5m", "5m", "0m"],
                ],
              },
            },
            time: { duration: "10s" },
            frequency: { channels: 1 },
            atmosphere: { kind: "turbulence", rms_at_1km: "20deg", outer_scale: "60km" },
          },
          1,
          2,
        );
        sum += first! ** 2;
      }
      return sum / seeds;
    };
    const [short, long] = [await square(0.1), await square(1)];
    const rms = (Math.sqrt(long) * 180) / Math.PI;
    // 60 draws know the rms to 1/sqrt(120) = 9 %: three of these.
    expect(Math.abs(rms / 20 - 1)).toBeLessThan(0.28);
    const power = Math.log10(long / short);
    expect(power).toBeGreaterThan(5 / 3 - 0.35);
    expect(power).toBeLessThan(5 / 3 + 0.35);
  });

  it("is a delay: its phase grows with frequency", async () => {
    const { dataset } = simulated({
      noise: 0,
      frequency: { channels: 2, width: "100MHz" },
      atmosphere: { kind: "walk", rms_per_minute: "5deg" },
    });
    const { real, imag } = await readAll(dataset);
    for (let i = 0; i < real.length; i += 4) {
      const low = Math.atan2(imag[i]!, real[i]!);
      const high = Math.atan2(imag[i + 2]!, real[i + 2]!);
      if (Math.abs(low) > 0.01 && Math.abs(low) < 2.5) expect(high / low).toBeCloseTo(1.5 / 1.4, 4);
    }
  });
});
