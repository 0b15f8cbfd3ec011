/** Each fault does what its truth says, to the samples its truth names and to no other. */

import { describe, expect, it } from "vitest";
import { type Dataset, type SampleBlock, sampleIndex } from "../../src/dataset/dataset.ts";
import { type Simulated, simulate } from "../../src/simulate/simulate.ts";
import { SPEED_OF_LIGHT } from "../../src/util/constants.ts";
import { readAll, sameBits } from "../support/read-all.ts";
import { type Changes, FAULTY, simulated, withFaults } from "../support/scenarios.ts";

type Faults = Parameters<typeof withFaults>[0];

/** The same observation without its faults. */
function cleanOf({ truth }: Simulated): Dataset {
  return simulate({ ...truth.observation.scenario, faults: [] }).dataset;
}

/** Samples of which a fault of the signal can change some only. */
const CROSS_HANDS: Changes = { polarizations: ["RR", "LL", "RL", "LR"], autocorrelations: true };
const MORE = {
  jumpWithCrossHands: () => withFaults([{ kind: "phase-jump", antenna: 4, degrees: 30 }], CROSS_HANDS),
  gainWithCrossHands: () =>
    withFaults([{ kind: "gain-step", antenna: 4, factor: 2, hand: "R" }], CROSS_HANDS),
  modelWithCrossHands: () =>
    withFaults(
      [{ kind: "antenna-position", antenna: 4, offset: ["9m", "0m", "0m"], of: "model" }],
      CROSS_HANDS,
    ),
  exchangedWithCrossHands: () => withFaults([{ kind: "exchanged-hands", antenna: 4 }], CROSS_HANDS),
  leakingHands: () =>
    withFaults([{ kind: "silent-antenna", antenna: 4 }], { ...CROSS_HANDS, gains: { leakage: 0.05 } }),
} as const;

const CHANGE_ROWS = ["missing-rows", "duplicate-rows", "reversed-rows"];

describe("the truth mask", () => {
  const cases = Object.entries({ ...FAULTY, ...MORE })
    .map(([name, make]) => ({ name, simulated: make() }))
    .filter(({ simulated: { truth } }) => !truth.faults.some(({ kind }) => CHANGE_ROWS.includes(kind)));
  const spoiling = (of: string) =>
    cases.filter(({ simulated: { truth } }) => truth.faults.some(({ spoils }) => spoils === of));

  it("stands for every kind of fault", () => {
    expect(spoiling("values").length).toBeGreaterThan(20);
    expect(spoiling("weights").length).toBe(2);
    expect(spoiling("flags").length).toBe(2);
    expect(spoiling("geometry").length).toBe(6);
  });

  it.each(spoiling("values"))(
    "of $name marks the samples that differ from clean data, and no others",
    async ({ simulated: faulty }) => {
      const [clean, dirty] = [await readAll(cleanOf(faulty)), await readAll(faulty.dataset)];
      const mask = faulty.truth.mask(dirty);
      let [missed, invented, marked] = [0, 0, 0];
      for (let i = 0; i < mask.length; i++) {
        const same = Object.is(clean.real[i], dirty.real[i]) && Object.is(clean.imag[i], dirty.imag[i]);
        missed += !same && mask[i] === 0 ? 1 : 0;
        invented += same && mask[i] === 1 ? 1 : 0;
        marked += mask[i]!;
      }
      expect({ missed, invented }).toEqual({ missed: 0, invented: 0 });
      expect(marked).toBeGreaterThan(0);
      expect(marked).toBeLessThan(mask.length);
      expect(sameBits(dirty.weight, clean.weight)).toBe(true);
    },
  );

  it.each([...spoiling("weights"), ...spoiling("flags")])(
    "of $name marks the weights that differ",
    async ({ simulated: faulty }) => {
      const [clean, dirty] = [await readAll(cleanOf(faulty)), await readAll(faulty.dataset)];
      const mask = faulty.truth.mask(dirty, 0);
      const differing = dirty.weight.map((weight, i) => (Object.is(weight, clean.weight[i]) ? 0 : 1));
      expect(mask.findIndex((mark, i) => mark !== differing[i])).toBe(-1);
      expect(faulty.truth.mask(dirty).every((mark) => mark === 0)).toBe(true);
      expect(sameBits(dirty.real, clean.real)).toBe(true);
    },
  );

  it("is of one fault, or of all that spoil values", async () => {
    const { dataset, truth } = FAULTY.three();
    const rows = { firstRow: 100, rows: 50 };
    const all = truth.mask(rows);
    const each = truth.faults.map((_, fault) => truth.mask(rows, fault));
    expect([...all]).toEqual([...all].map((_, i) => (each.some((mask) => mask[i] === 1) ? 1 : 0)));
    const counts = await truth.counts();
    const whole = truth.mask({ firstRow: 0, rows: dataset.rows }, 1);
    expect(counts[1]).toBe(whole.reduce((sum, mark) => sum + mark, 0));
  });

  it("lies inside the selection", async () => {
    for (const { simulated: faulty } of cases) {
      const block = await readAll(faulty.dataset, { want: "rows" });
      faulty.truth.faults.forEach((fault, index) => {
        const mask = faulty.truth.mask(block, index);
        expect(marksOutside(mask, block, faulty.dataset, fault.selection), fault.kind).toBe(0);
      });
    }
  });
});

/** Marks of samples that the selection does not hold. */
function marksOutside(
  mask: Uint8Array,
  block: SampleBlock,
  { shape, polarizations }: Dataset,
  selection: Simulated["truth"]["faults"][number]["selection"],
): number {
  let outside = 0;
  for (let row = 0; row < block.rows; row++) {
    const [a, b] = [block.antenna1[row]!, block.antenna2[row]!];
    const rowInside =
      (selection.antennas?.some((antenna) => antenna === a || antenna === b) ?? true) &&
      (selection.baselines?.some(([p, q]) => (p === a && q === b) || (p === b && q === a)) ?? true) &&
      (selection.time === null ||
        (block.time[row]! >= selection.time[0] && block.time[row]! <= selection.time[1]));
    for (let channel = 0; channel < shape.channels; channel++) {
      for (let p = 0; p < shape.polarizations; p++) {
        const inside =
          rowInside &&
          (selection.channels?.some(([low, high]) => channel >= low && channel <= high) ?? true) &&
          (selection.polarizations?.includes(polarizations[p]!) ?? true);
        if (!inside) outside += mask[sampleIndex(shape, row, 0, channel, p)]!;
      }
    }
  }
  return outside;
}

/** One row of a noise-free dataset at a time after the start. */
async function rowAt(
  faults: Faults,
  pair: readonly [number, number],
  minutes: number,
  changes: Changes = {},
): Promise<{ re: Float32Array; im: Float32Array; sigma: number; block: SampleBlock; row: number }> {
  const { dataset } = withFaults(faults, { noise: 0, ...changes });
  const block = await readAll(dataset);
  const perRow = block.real.length / block.rows;
  for (let row = 0; row < block.rows; row++) {
    const at = (block.time[row]! - 61100.5) * 1440;
    if (block.antenna1[row] !== pair[0] || block.antenna2[row] !== pair[1] || at < minutes) continue;
    return {
      re: block.real.slice(row * perRow, (row + 1) * perRow),
      im: block.imag.slice(row * perRow, (row + 1) * perRow),
      sigma: 1 / Math.sqrt(block.weight[row * perRow]!),
      block,
      row,
    };
  }
  throw new Error(`no row of ${pair.join("-")} at ${minutes} min`);
}

function degrees(re: number, im: number): number {
  return (Math.atan2(im, re) * 180) / Math.PI;
}

describe("an antenna's fault", () => {
  it("turns the phase by + on its first place and - on its second, from its time on", async () => {
    const jump: Faults = [{ kind: "phase-jump", antenna: 4, degrees: 40, time: ["12min", "20min"] }];
    const first = await rowAt(jump, [4, 7], 15);
    const second = await rowAt(jump, [2, 4], 15);
    expect(degrees(first.re[0]!, first.im[0]!)).toBeCloseTo(40, 4);
    expect(degrees(second.re[0]!, second.im[0]!)).toBeCloseTo(-40, 4);
    for (const minutes of [11.7, 20.1]) {
      const outside = await rowAt(jump, [4, 7], minutes);
      expect(degrees(outside.re[0]!, outside.im[0]!)).toBeCloseTo(0, 4);
    }
  });

  it("slopes the phase across the band by 2 pi nu times the delay", async () => {
    const { re, im } = await rowAt([{ kind: "delay-slope", antenna: 4, nanoseconds: 30 }], [4, 7], 1);
    // 360 degrees x 500 kHz x 30 ns a channel
    const step = degrees(re[2]!, im[2]!) - degrees(re[0]!, im[0]!);
    expect(step).toBeCloseTo(5.4, 4);
    const middle = (degrees(re[14]!, im[14]!) + degrees(re[16]!, im[16]!)) / 2;
    expect(middle).toBeCloseTo(0, 4);
  });

  it("takes the signal away, weakens it, steps its gain", async () => {
    const silent = await rowAt([{ kind: "silent-antenna", antenna: 4 }], [4, 7], 1);
    const weak = await rowAt([{ kind: "weak-antenna", antenna: 4, factor: 0.4 }], [4, 7], 1);
    const turned = await rowAt([{ kind: "half-turn", antenna: 4 }], [4, 7], 1);
    expect(new Set(silent.re)).toEqual(new Set([0]));
    expect(weak.re[0]).toBeCloseTo(0.4, 6);
    expect(turned.re[0]).toBeCloseTo(-1, 6);
  });

  it("scales noise with signal in a gain step, the noise alone of a noisy antenna, the signal alone of a weak one", async () => {
    const rms = async (faults: Faults) => {
      const { dataset, truth } = withFaults(faults, { sky: [] });
      const block = await readAll(dataset);
      const mask = truth.mask(block);
      const perRow = mask.length / block.rows;
      let [sum, count] = [0, 0];
      for (let row = 0; row < block.rows; row++) {
        if (block.antenna1[row] !== 4 && block.antenna2[row] !== 4) continue;
        for (let i = row * perRow; i < (row + 1) * perRow; i++) {
          sum += block.real[i]! ** 2 * block.weight[i]!;
          count += 1;
        }
      }
      return { inSigmas: Math.sqrt(sum / count), error: 1 / Math.sqrt(2 * count) };
    };
    const step = await rms([{ kind: "gain-step", antenna: 4, factor: 1.5 }]);
    const noisy = await rms([{ kind: "noisy", antenna: 4, factor: 3 }]);
    const weak = await rms([{ kind: "weak-antenna", antenna: 4, factor: 0.4 }]);
    expect(Math.abs(step.inSigmas - 1.5)).toBeLessThan(5 * 1.5 * step.error);
    expect(Math.abs(noisy.inSigmas - 3)).toBeLessThan(5 * 3 * noisy.error);
    expect(Math.abs(weak.inSigmas - 1)).toBeLessThan(5 * weak.error);
  });

  it("may be of one hand", async () => {
    const polarizations = ["RR", "LL", "RL", "LR"] as const;
    const sky = [{ flux: "1Jy", q: 0.5 }];
    const off: Faults = [{ kind: "hand-off", antenna: 4, hand: "L" }];
    const first = await rowAt(off, [4, 7], 1, { polarizations: [...polarizations], sky });
    const second = await rowAt(off, [2, 4], 1, { polarizations: [...polarizations], sky });
    // As first antenna its L is in LL and LR, as second in LL and RL.
    expect([...first.re.slice(0, 4)]).toEqual([1, 0, 0.5, 0]);
    expect([...second.re.slice(0, 4)]).toEqual([1, 0, 0, 0.5]);
  });

  it("exchanges the hands", async () => {
    const { re } = await rowAt([{ kind: "exchanged-hands", antenna: 4 }], [4, 7], 1, {
      polarizations: ["RR", "LL", "RL", "LR"],
      sky: [{ flux: "1Jy", v: 0.2 }],
    });
    // R and L of antenna 4 change places: what stands as RR is L x R, what stands as LR is R x R.
    [0, 0, 0.8, 1.2].forEach((value, i) => {
      expect(re[i]).toBeCloseTo(value, 6);
    });
  });

  it("drops out for its share of the time, and trembles by its rms", async () => {
    const { dataset, truth } = withFaults([{ kind: "dropout", antenna: 4, share: 0.3, stretch: "20s" }], {
      time: { duration: "3h" },
      frequency: { channels: 1 },
      noise: 0,
    });
    const [count] = await truth.counts();
    const touched = count! / ((dataset.rows / 36) * 8 * 2);
    // 540 stretches: the share is known to sqrt(0.3 x 0.7/540) = 0.02.
    expect(Math.abs(touched - 0.3)).toBeLessThan(0.08);
    const trembling = withFaults([{ kind: "phase-noise", antenna: 4, degrees: 20 }], {
      time: { duration: "3h" },
      frequency: { channels: 1 },
      noise: 0,
    }).dataset;
    const block = await readAll(trembling);
    let [sum, number] = [0, 0];
    for (let row = 0; row < block.rows; row++) {
      if (block.antenna1[row] !== 4 || block.antenna2[row] !== 7) continue;
      sum += degrees(block.real[row * 2]!, block.imag[row * 2]!) ** 2;
      number += 1;
    }
    expect(Math.abs(Math.sqrt(sum / number) - 20)).toBeLessThan((5 * 20) / Math.sqrt(2 * number));
  });
});

describe("a correlator's fault", () => {
  it("is on one baseline, so that closure phases with it are off by its size", async () => {
    const fault: Faults = [{ kind: "baseline-phase", baseline: [2, 6], degrees: 50 }];
    const phase = async (a: number, b: number) => {
      const { re, im } = await rowAt(fault, [a, b], 1);
      return degrees(re[0]!, im[0]!);
    };
    const closure = async (a: number, b: number, c: number) =>
      (await phase(a, b)) + (await phase(b, c)) - (await phase(a, c));
    expect(await closure(2, 4, 6)).toBeCloseTo(-50, 4);
    expect(await closure(1, 2, 6)).toBeCloseTo(50, 4);
    expect(await closure(1, 2, 4)).toBeCloseTo(0, 4);
  });

  it("named the other way round turns the other way", async () => {
    const { re, im } = await rowAt([{ kind: "baseline-phase", baseline: [6, 2], degrees: 50 }], [2, 6], 1);
    expect(degrees(re[0]!, im[0]!)).toBeCloseTo(-50, 4);
  });
});

describe("interference", () => {
  it("is as strong as it says, in sigmas or Jy, with a phase that baselines, times and channels do not share", async () => {
    const line: Faults = [{ kind: "persistent-line", channels: "5,6", amplitude: "6 sigma" }];
    const { re, im, sigma } = await rowAt(line, [2, 6], 1, { sky: [] });
    expect(Math.hypot(re[10]!, im[10]!) / sigma).toBeCloseTo(6, 4);
    expect([...re.slice(0, 10), ...re.slice(14)].every((value) => value === 0)).toBe(true);
    const later = await rowAt(line, [2, 6], 9, { sky: [] });
    const other = await rowAt(line, [3, 6], 1, { sky: [] });
    const phases = [re, later.re, other.re].map((values) => values[10]);
    expect(new Set(phases).size).toBe(3);
    const jansky = await rowAt([{ kind: "burst", amplitude: "3Jy" }], [2, 6], 1, { sky: [] });
    expect(Math.hypot(jansky.re[0]!, jansky.im[0]!)).toBeCloseTo(3, 5);
  });

  it("closes in phase: it is one transmitter", async () => {
    const line: Faults = [{ kind: "persistent-line", channels: "5", amplitude: "2Jy" }];
    const phase = async (a: number, b: number) => {
      const { re, im } = await rowAt(line, [a, b], 1, { sky: [] });
      return Math.atan2(im[10]!, re[10]!);
    };
    const closure = (await phase(1, 4)) + (await phase(4, 8)) - (await phase(1, 8));
    expect(Math.cos(closure)).toBeCloseTo(1, 4);
  });

  it("drifts one way over its channels, as many wide as it says", async () => {
    const { dataset, truth } = withFaults([
      {
        kind: "drifting-line",
        from_channel: 12,
        to_channel: 2,
        width: 3,
        time: ["5min", "25min"],
        amplitude: "9 sigma",
      },
    ]);
    const mask = truth.mask({ firstRow: 0, rows: dataset.rows });
    let last = 13;
    for (let t = 30; t < 150; t++) {
      const channels: number[] = [];
      for (let c = 0; c < 16; c++) if (mask[(t * 36 * 16 + c) * 2] === 1) channels.push(c);
      expect(channels).toHaveLength(3);
      expect(channels[2]! - channels[0]!).toBe(2);
      expect(channels[0]).toBeLessThanOrEqual(last);
      last = channels[0]!;
    }
    expect(last).toBe(2);
    expect(truth.faults[0]!.selection.channels).toEqual([[2, 14]]);
  });

  it("may reach short baselines alone, which its selection names", async () => {
    const { truth } = FAULTY.shortBaselineBurst();
    const { baselines } = truth.faults[0]!.selection;
    const { stations } = truth.observation;
    const length = (a: number, b: number) => {
      const [p, q] = [a, b].map((number) => stations[number - 1]!.actual);
      return Math.hypot(p![0] - q![0], p![1] - q![1], p![2] - q![2]);
    };
    expect(baselines!.length).toBeGreaterThan(3);
    for (let a = 1; a <= 9; a++) {
      for (let b = a + 1; b <= 9; b++) {
        const named = baselines!.some(([p, q]) => p === a && q === b);
        expect(named).toBe(length(a, b) < 300);
      }
    }
  });
});

describe("samples and weights", () => {
  it("are zero, not finite, flagged or weighed wrongly where the fault says", async () => {
    const zeros = await rowAt([{ kind: "stuck-zeros", antennas: [4] }], [4, 7], 1, { noise: 1 });
    expect(new Set(zeros.re)).toEqual(new Set([0]));
    const nan = await rowAt([{ kind: "not-finite", channels: "7" }], [1, 2], 1);
    expect(nan.re[14]).toBeNaN();
    const infinite = await rowAt([{ kind: "not-finite", value: "Inf", of: "weight" }], [1, 2], 1);
    expect(infinite.block.weight[0]).toBe(Number.POSITIVE_INFINITY);
    const flagged = await rowAt([{ kind: "flags", antennas: [4] }], [4, 7], 1);
    const perRow = flagged.re.length;
    expect(flagged.block.weight[flagged.row * perRow]).toBeLessThan(0);
    const heavy = await rowAt([{ kind: "weight-mismatch", antennas: [4], factor: 10 }], [4, 7], 1);
    const plain = await readAll(simulated({ noise: 0 }).dataset);
    const i = heavy.row * perRow;
    expect(heavy.block.weight[i]).toBeCloseTo(10 * plain.weight[i]!, 2);
  });
});

describe("geometry", () => {
  const metres = (block: SampleBlock, row: number) =>
    [block.u[row]!, block.v[row]!, block.w[row]!].map((seconds) => seconds * SPEED_OF_LIGHT);
  const cleanRow = () => rowAt([], [4, 7], 1);

  it("has an axis flipped or zeroed, or units mistaken", async () => {
    const clean = await cleanRow();
    const flipped = await rowAt([{ kind: "flipped-axis", axis: "v" }], [4, 7], 1);
    const zeroed = await rowAt([{ kind: "zeroed-axis" }], [4, 7], 1);
    const unit = await rowAt([{ kind: "wrong-unit", unit: "metres" }], [4, 7], 1);
    const { u, v, w } = clean.block;
    const at = clean.row;
    expect([flipped.block.u[at], flipped.block.v[at]]).toEqual([u[at], -v[at]!]);
    expect([zeroed.block.u[at], zeroed.block.w[at]]).toEqual([u[at], 0]);
    expect(unit.block.w[at]).toBeCloseTo(w[at]! * SPEED_OF_LIGHT, 4);
  });

  it("has antennas in the wrong order, labels alone", async () => {
    const fault: Faults = [{ kind: "swapped-order", baselines: [[4, 7]] }];
    const [clean, swapped] = [await cleanRow(), await rowAt(fault, [7, 4], 1)];
    expect(metres(swapped.block, swapped.row)).toEqual(metres(clean.block, clean.row));
    expect(swapped.re).toEqual(clean.re);
  });

  it("has an antenna off by metres in the table, in u, v, w, or in all the correlator knew", async () => {
    const offset = ["20m", "-10m", "5m"] as [string, string, string];
    const size = Math.hypot(20, 10, 5);
    const clean = await cleanRow();
    const plain = simulated().dataset.array.antennas[3]!.position!;
    for (const of of ["table", "uvw", "model"] as const) {
      const faults: Faults = [{ kind: "antenna-position", antenna: 4, offset, of }];
      const wrong = await rowAt(faults, [4, 7], 1, { sky: [{ flux: "1Jy" }] });
      const { dataset, truth } = withFaults(faults);
      const moved = dataset.array.antennas[3]!.position!;
      const byTable = Math.hypot(...plain.map((x, i) => moved[i]! - x));
      const [a, b] = [metres(wrong.block, wrong.row), metres(clean.block, clean.row)];
      const byUvw = Math.hypot(...a.map((x, i) => x - b[i]!));
      expect(byTable).toBeCloseTo(of === "uvw" ? 0 : size, 3);
      expect(byUvw).toBeCloseTo(of === "table" ? 0 : size, 3);
      expect(truth.faults[0]!.size).toBeCloseTo(size, 9);
      if (of !== "model") {
        expect(degrees(wrong.re[0]!, wrong.im[0]!)).toBeCloseTo(0, 4);
        continue;
      }
      // The correlator followed the wrong w: the phase of a source at its centre runs with nu x (true w - wrong w).
      const turns = (1.4e9 * (b[2]! - a[2]!)) / SPEED_OF_LIGHT;
      const expected = -360 * (turns - Math.round(turns));
      expect(degrees(wrong.re[0]!, wrong.im[0]!)).toBeCloseTo(expected, 0);
    }
  });
});
