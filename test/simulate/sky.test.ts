/**
 * Noise-free visibilities against the measurement equation written out with u, v, w of the rows (Thompson, Moran & Swenson
 * 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., Eq. 3.7), and averages against fine sums.
 */
import { describe, expect, it } from "vitest";
import { type Dataset, type SampleBlock, sampleIndex } from "../../src/dataset/dataset.ts";
import { EARTH_ROTATION_RATE } from "../../src/geometry/sidereal.ts";
import { uvwPerHourAngle } from "../../src/geometry/uvw.ts";
import { readAll } from "../support/read-all.ts";
import { type Changes, simulated } from "../support/scenarios.ts";

const ARCMIN = Math.PI / 180 / 60;
const FEW_ROWS: Changes = { noise: 0, time: { duration: "5min", integration: "30s" } };

/**
 * u, v, w of a row are rounded to single precision, a phase of up to 1e-3 rad for the longest baselines and offsets here.
 */
const PHASE_ROUNDING = 2e-3;

interface Position {
  readonly l: number;
  readonly m: number;
}

function position(eastArcmin: number, northArcmin: number): Position {
  return { l: Math.sin(eastArcmin * ARCMIN), m: Math.sin(northArcmin * ARCMIN) };
}

/** exp(-2 pi i nu (u l + v m + w (n - 1))) of a row at a frequency. */
function phaseOf(block: SampleBlock, row: number, { l, m }: Position, nu: number): number {
  const n = Math.sqrt(1 - l * l - m * m);
  return -2 * Math.PI * nu * (block.u[row]! * l + block.v[row]! * m + block.w[row]! * (n - 1));
}

/** Largest distance between the samples and what `model` says, over every row, sub-band, channel and polarization. */
async function worst(
  dataset: Dataset,
  model: (block: SampleBlock, row: number, nu: number, polarization: number) => [number, number],
): Promise<number> {
  const block = await readAll(dataset);
  const { shape } = dataset;
  const { frequencies } = dataset.setups[0]!;
  let distance = 0;
  for (let row = 0; row < block.rows; row++) {
    for (let c = 0; c < frequencies.length; c++) {
      for (let p = 0; p < shape.polarizations; p++) {
        const [re, im] = model(block, row, frequencies[c]!, p);
        const i = sampleIndex(shape, row, 0, c, p);
        distance = Math.max(distance, Math.hypot(block.real[i]! - re, block.imag[i]! - im));
      }
    }
  }
  return distance;
}

describe("visibilities of a point source", () => {
  it("are its flux, with no phase, at the phase centre", async () => {
    const { dataset } = simulated(FEW_ROWS);
    expect(await worst(dataset, () => [1, 0])).toBeLessThan(1e-6);
  });

  it("follow the measurement equation away from it, in every sub-band, falling frequencies too", async () => {
    for (const descending of [false, true]) {
      const { dataset } = simulated({
        ...FEW_ROWS,
        smearing: false,
        frequency: { subbands: 3, channels: 16, spacing: "20MHz", descending },
        sky: [{ flux: "2Jy", east: "7arcmin", north: "-11arcmin" }],
      });
      const at = position(7, -11);
      const difference = await worst(dataset, (block, row, nu) => {
        const phase = phaseOf(block, row, at, nu);
        return [2 * Math.cos(phase), 2 * Math.sin(phase)];
      });
      expect(difference).toBeLessThan(2 * PHASE_ROUNDING);
    }
  });

  it("keep their phase over a thousand channels", async () => {
    const { dataset } = simulated({
      ...FEW_ROWS,
      smearing: false,
      array: { layout: { kind: "ring", antennas: 4, radius: "100m" } },
      frequency: { channels: 1024, width: "100kHz" },
      sky: [{ flux: "1Jy", east: "20arcmin" }],
    });
    const at = position(20, 0);
    const difference = await worst(dataset, (block, row, nu) => {
      const phase = phaseOf(block, row, at, nu);
      return [Math.cos(phase), Math.sin(phase)];
    });
    // 200 m and 20 arcmin: single-precision u, v, w are worth 1e-4 rad.
    expect(difference).toBeLessThan(2e-4);
  });

  it("add up for several sources, with their spectra", async () => {
    const { dataset } = simulated({
      ...FEW_ROWS,
      smearing: false,
      frequency: { channels: 32, width: "4MHz" },
      sky: [
        { flux: "1Jy", spectral_index: -0.8, reference: "1.4GHz" },
        { flux: "0Jy", east: "2arcmin", line: { centre: "1.45GHz", width: "20MHz", flux: "3Jy" } },
      ],
    });
    const at = position(2, 0);
    const difference = await worst(dataset, (block, row, nu) => {
      const continuum = (nu / 1.4e9) ** -0.8;
      // A Gaussian that is half its peak at half its width.
      const line = 3 * 2 ** -(((2 * (nu - 1.45e9)) / 20e6) ** 2);
      const phase = phaseOf(block, row, at, nu);
      return [continuum + line * Math.cos(phase), line * Math.sin(phase)];
    });
    expect(difference).toBeLessThan(4 * PHASE_ROUNDING);
  });
});

describe("a Gaussian source", () => {
  it("fades with baseline length and direction as its transform does", async () => {
    const { dataset } = simulated({
      ...FEW_ROWS,
      sky: [{ flux: "5Jy", major: "60arcsec", minor: "20arcsec", angle: "25deg" }],
    });
    const [major, minor] = [60, 20].map((arcsec) => (arcsec / 60) * ARCMIN) as [number, number];
    const angle = (25 * Math.PI) / 180;
    const difference = await worst(dataset, (block, row, nu) => {
      const [u, v] = [block.u[row]! * nu, block.v[row]! * nu];
      // Transform of a Gaussian of FWHM theta: exp(-(pi theta q)^2/(4 ln 2)), q along each axis.
      const along = u * Math.sin(angle) + v * Math.cos(angle);
      const across = u * Math.cos(angle) - v * Math.sin(angle);
      const power = ((Math.PI * major * along) ** 2 + (Math.PI * minor * across) ** 2) / (4 * Math.LN2);
      return [5 * Math.exp(-power), 0];
    });
    expect(difference).toBeLessThan(1e-5);
  });
});

describe("smearing", () => {
  it("is what a fine sum over the channel's width and the integration's length gives", async () => {
    const { dataset, truth } = simulated({
      noise: 0,
      time: { duration: "4min", integration: "60s" },
      frequency: { channels: 4, width: "6MHz" },
      sky: [{ flux: "1Jy", east: "30arcmin", north: "-18arcmin" }],
    });
    const at = position(30, -18);
    const { declination } = dataset.fields[0]!;
    const turnOf = (k: number, steps: number) => ((k + 0.5) / steps - 0.5) * 60 * EARTH_ROTATION_RATE;
    const difference = await worst(dataset, (block, row, nu) => {
      const uvw = [block.u[row]!, block.v[row]!, block.w[row]!] as const;
      const rate = uvwPerHourAngle(uvw, declination);
      const n = Math.sqrt(1 - at.l ** 2 - at.m ** 2);
      let [re, im] = [0, 0];
      const steps = 40;
      for (let i = 0; i < steps; i++) {
        // To first order in time, as the formula is; the second order is below the tolerance.
        const [u, v, w] = uvw.map((x, k) => x + rate[k]! * turnOf(i, steps)) as [number, number, number];
        for (let j = 0; j < steps; j++) {
          const f = nu + ((j + 0.5) / steps - 0.5) * 6e6;
          const phase = -2 * Math.PI * f * (u * at.l + v * at.m + w * (n - 1));
          re += Math.cos(phase);
          im += Math.sin(phase);
        }
      }
      return [re / steps ** 2, im / steps ** 2];
    });
    expect(truth.faults).toEqual([]);
    // The cross term of time and frequency that the product of the two losses leaves out.
    expect(difference).toBeLessThan(3e-4);
  });

  it("takes something, so that the check above is one", async () => {
    const loss = async (smearing: boolean) => {
      const { dataset } = simulated({
        noise: 0,
        smearing,
        time: { duration: "2min", integration: "60s" },
        frequency: { channels: 4, width: "6MHz" },
        sky: [{ flux: "1Jy", east: "30arcmin", north: "-18arcmin" }],
      });
      const { real, imag } = await readAll(dataset);
      return Math.min(...real.map((re, i) => Math.hypot(re, imag[i]!)));
    };
    expect(await loss(false)).toBeCloseTo(1, 5);
    expect(await loss(true)).toBeLessThan(0.85);
  });
});

describe("a passing source", () => {
  it("is brightest at its time and half as bright half a width away", async () => {
    const { dataset } = simulated({
      noise: 0,
      time: { duration: "20min", integration: "10s" },
      sky: [{ flux: "4Jy", transit: { at: "605s", width: "4min" } }],
    });
    const block = await readAll(dataset);
    const perRow = block.real.length / block.rows;
    const brightness = new Map<number, number>();
    const start = block.time[0]! - 5 / 86400;
    for (let row = 0; row < block.rows; row++) {
      const seconds = Math.round((block.time[row]! - start) * 86400);
      brightness.set(seconds, block.real[row * perRow]!);
    }
    expect(brightness.get(605)).toBeCloseTo(4, 4);
    expect(brightness.get(485)).toBeCloseTo(2, 4);
    expect(brightness.get(725)).toBeCloseTo(2, 4);
  });
});

describe("feeds", () => {
  // Circular: RR = I + V, LL = I - V, RL = Q + iU, LR = Q - iU; linear: XX = I + Q, YY = I - Q, XY = U + iV, YX = U - iV
  // (Hamaker & Bregman 1996, A&AS 117, 161).
  const source = { flux: "2Jy", q: 0.1, u: -0.2, v: 0.05 };

  it("see the Stokes parameters as the textbook has it", async () => {
    const cases = [
      { polarizations: ["RR", "LL", "RL", "LR"], expected: [2.1, 1.9, [0.2, -0.4], [0.2, 0.4]] },
      { polarizations: ["XX", "YY", "XY", "YX"], expected: [2.2, 1.8, [-0.4, 0.1], [-0.4, -0.1]] },
      { polarizations: ["I", "Q", "U", "V"], expected: [2, 0.2, -0.4, 0.1] },
      { polarizations: ["LL"], expected: [1.9] },
    ] as const;
    for (const { polarizations, expected } of cases) {
      const { dataset } = simulated({ ...FEW_ROWS, sky: [source], polarizations: [...polarizations] });
      const difference = await worst(dataset, (_block, _row, _nu, p) => {
        const value = expected[p]!;
        return typeof value === "number" ? [value, 0] : [value[0], value[1]];
      });
      expect(difference, polarizations.join(" ")).toBeLessThan(1e-6);
    }
  });

  it("leak a share of I into the cross hands", async () => {
    const { dataset } = simulated({
      ...FEW_ROWS,
      polarizations: ["RR", "LL", "RL", "LR"],
      gains: { leakage: 0.05 },
    });
    const { real, imag } = await readAll(dataset);
    let power = 0;
    for (let i = 2; i < real.length; i += 4) power += real[i]! ** 2 + imag[i]! ** 2;
    // Two antennas' leakages of rms 0.05 add in power; nine antennas leave their mean square uncertain by a third.
    const rms = Math.sqrt(power / (real.length / 4));
    expect(rms).toBeGreaterThan(0.05);
    expect(rms).toBeLessThan(0.1);
  });

  it("of an antenna with itself see its own noise power", async () => {
    const { dataset } = simulated({ ...FEW_ROWS, autocorrelations: true });
    const block = await readAll(dataset);
    const perRow = block.real.length / block.rows;
    let autos = 0;
    for (let row = 0; row < block.rows; row++) {
      if (block.antenna1[row] !== block.antenna2[row]) continue;
      autos += 1;
      expect(block.real[row * perRow]).toBeCloseTo(401, 3);
      expect(block.imag[row * perRow]).toBe(0);
      expect([block.u[row], block.v[row], block.w[row]]).toEqual([0, 0, 0]);
    }
    expect(autos).toBe(90);
  });
});
