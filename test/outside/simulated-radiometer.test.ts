/**
 * The noise of simulated samples, and what their weights promise for an image, against the radiometer equation's check
 * values (radiometer-check-values.json): sqrt(SEFD1 SEFD2)/(eta sqrt(2 dnu tau)) a baseline, and
 * SEFD/(eta sqrt(n_pol N (N - 1) dnu t)) an image (Thompson, Moran & Swenson 2017, section 6.2).
 */
import { describe, expect, it } from "vitest";
import { stored } from "../support/fresh.ts";
import { readAll } from "../support/read-all.ts";
import { simulated } from "../support/scenarios.ts";

const { entries } = stored<{ entries: { id: string; inputs: Record<string, number>; expected: number }[] }>(
  "radiometer-check-values",
);
function entry(id: string) {
  const found = entries.find((one) => one.id === id);
  if (found === undefined) throw new Error(`no check value ${id}`);
  return found;
}

describe("noise of a baseline", () => {
  it("has the rms of the radiometer equation in both parts, and weights 1/sigma^2", async () => {
    const { inputs, expected } = entry("radiometer-baseline");
    const { dataset } = simulated({
      sky: [],
      array: {
        layout: { kind: "ring", antennas: 3, radius: "200m" },
        sefds: { "1": `${inputs.sefd1_jy}Jy`, "2": `${inputs.sefd2_jy}Jy` },
        efficiency: inputs.eta!,
      },
      time: { duration: "1h", integration: `${inputs.tau_s}s` },
      frequency: { channels: 64, width: `${inputs.bandwidth_hz}Hz` },
    });
    const block = await readAll(dataset);
    const perRow = block.real.length / block.rows;
    let [squareRe, squareIm, product, count] = [0, 0, 0, 0];
    for (let row = 0; row < block.rows; row++) {
      if (block.antenna1[row] !== 1 || block.antenna2[row] !== 2) continue;
      for (let i = row * perRow; i < (row + 1) * perRow; i++) {
        squareRe += block.real[i]! ** 2;
        squareIm += block.imag[i]! ** 2;
        product += block.real[i]! * block.imag[i]!;
        expect(Math.abs(block.weight[i]! * expected ** 2 - 1)).toBeLessThan(1e-6);
        count += 1;
      }
    }
    expect(count).toBe(360 * 128);
    // The rms of n samples is known to 1/sqrt(2 n) of itself: five of these.
    const tolerance = (5 * expected) / Math.sqrt(2 * count);
    expect(Math.abs(Math.sqrt(squareRe / count) - expected)).toBeLessThan(tolerance);
    expect(Math.abs(Math.sqrt(squareIm / count) - expected)).toBeLessThan(tolerance);
    // Real and imaginary part know nothing of each other.
    expect(Math.abs(product / count)).toBeLessThan((5 * expected ** 2) / Math.sqrt(count));
  });
});

describe("noise of an image", () => {
  it("is what the sum of the weights says", async () => {
    const { inputs, expected } = entry("radiometer-image");
    const { dataset } = simulated({
      array: {
        layout: { kind: "ring", antennas: inputs.antennas!, radius: "300m" },
        sefd: `${inputs.sefd_jy}Jy`,
        efficiency: inputs.eta!,
      },
      time: { duration: `${inputs.time_s}s`, integration: "60s" },
      frequency: { start: "10GHz", channels: 1, width: `${inputs.bandwidth_hz}Hz` },
    });
    const { weight } = await readAll(dataset, { want: "weights" });
    const sum = weight.reduce((total, one) => total + one, 0);
    expect(Math.abs(1 / Math.sqrt(sum) / expected - 1)).toBeLessThan(1e-6);
  });
});
