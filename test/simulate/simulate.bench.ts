/**
 * How fast simulated samples come: 1.35 million visibilities a run (27 antennas, 32 channels, 2 products), so that
 * runs a second x 1.35 is millions of visibilities a second.
 */
import { bench, describe } from "vitest";
import type { Dataset } from "../../src/dataset/dataset.ts";
import { Random } from "../../src/simulate/random.ts";
import { type Changes, simulated } from "../support/scenarios.ts";

const SIZE = {
  array: { layout: { kind: "spiral", antennas: 27, inner: "40m", radius: "1km" } },
  time: { duration: "10min" },
  frequency: { channels: 16, subbands: 2 },
} as const satisfies Changes;
const SAMPLES = 351 * 60 * 64;

async function readThrough(dataset: Dataset): Promise<void> {
  let samples = 0;
  for await (const block of dataset.blocks({ want: "samples" })) samples += block.rows * 64;
  if (samples !== SAMPLES) throw new Error(`${samples} samples instead of ${SAMPLES}`);
}

describe("1.35 million visibilities", () => {
  const plain = simulated(SIZE).dataset;
  const full = simulated({
    ...SIZE,
    sky: [
      { flux: "1Jy" },
      { flux: "0.3Jy", east: "5arcmin" },
      { flux: "2Jy", major: "40arcsec", north: "3arcmin" },
    ],
    gains: { amplitude: 0.1, phase: "30deg", bandpass: {} },
    atmosphere: { kind: "turbulence", rms_at_1km: "20deg" },
    faults: [
      { kind: "silent-antenna", antenna: 5 },
      { kind: "persistent-line", channels: "7", amplitude: "8 sigma" },
      { kind: "phase-jump", antenna: 8, degrees: 40, time: ["5min", "10min"] },
      { kind: "lone-samples", share: 0.001, amplitude: "20 sigma" },
    ],
  }).dataset;
  const normals = new Float64Array(2 * SAMPLES);

  bench("a point source and noise", () => readThrough(plain));
  bench("three sources, gains, air, noise and four faults", () => readThrough(full));
  bench("for comparison, as many normal deviates alone", () =>
    Random.of(1).fillNormals(normals, normals.length),
  );
});
