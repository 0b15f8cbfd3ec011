import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { SampleBlock } from "../../src/dataset/dataset.ts";
import { simulate } from "../../src/simulate/simulate.ts";
import { SPEED_OF_LIGHT } from "../../src/util/constants.ts";
import { readAll, sameBits } from "../support/read-all.ts";
import { CLEAN, scenarioWith, simulated, withFaults } from "../support/scenarios.ts";

const EVENTFUL = scenarioWith({
  array: { layout: { kind: "random", antennas: 6, radius: "600m" } },
  time: { duration: "5min", scan: "2min", gap: "30s" },
  frequency: { channels: 4, subbands: 2 },
  gains: { amplitude: 0.1, phase: "40deg", bandpass: {} },
  atmosphere: { kind: "turbulence", rms_at_1km: "30deg" },
  faults: [
    { kind: "lone-samples", share: 0.02, amplitude: "20 sigma" },
    { kind: "dropout", antenna: 3, share: 0.3 },
    { kind: "phase-noise", antenna: 2, degrees: 20 },
    { kind: "duplicate-rows", time: ["1min", "2min"] },
    { kind: "flags", share: 0.1 },
  ],
});

describe("a simulated dataset", () => {
  it("is the same every time", async () => {
    const [once, again] = [
      await readAll(simulate(EVENTFUL).dataset),
      await readAll(simulate(EVENTFUL).dataset),
    ];
    expect(again).toEqual(once);
  });

  it("differs by its seed", async () => {
    const one = await readAll(simulated().dataset);
    const other = await readAll(simulated({ seed: 2 }).dataset);
    expect(other.real[0]).not.toBe(one.real[0]);
    expect(sameBits(other.time, one.time)).toBe(true);
  });

  it("is the same whatever rows are asked for, in blocks of whatever size", async () => {
    const { dataset } = simulate(EVENTFUL);
    const whole = await readAll(dataset);
    const perRow = whole.real.length / whole.rows;
    await fc.assert(
      fc.asyncProperty(
        fc.nat(dataset.rows - 1),
        fc.nat(dataset.rows),
        fc.integer({ min: 1, max: 40 }),
        async (first, length, blockRows) => {
          const last = Math.min(dataset.rows, first + length);
          if (last === first) return;
          const part = await readAll(dataset, { rows: [first, last], blockRows });
          expect(part.real).toEqual(whole.real.slice(first * perRow, last * perRow));
          expect(part.weight).toEqual(whole.weight.slice(first * perRow, last * perRow));
          expect(part.time).toEqual(whole.time.slice(first, last));
          expect(part.antenna2).toEqual(whole.antenna2.slice(first, last));
        },
      ),
      { numRuns: 40 },
    );
  });

  it("may be read twice at once, and overwritten by its reader", async () => {
    const { dataset } = simulate(EVENTFUL);
    const whole = await readAll(dataset);
    const one = dataset.blocks({ want: "samples", blockRows: 7 })[Symbol.asyncIterator]();
    const two = dataset.blocks({ want: "samples", blockRows: 11 })[Symbol.asyncIterator]();
    const first = (await one.next()).value as SampleBlock;
    first.real.fill(99);
    first.weight.fill(-1);
    await two.next();
    const next = (await one.next()).value as SampleBlock;
    const perRow = whole.real.length / whole.rows;
    expect(next.real.slice(0, 7 * perRow)).toEqual(whole.real.slice(7 * perRow, 14 * perRow));
    expect(next.weight.slice(0, 7 * perRow)).toEqual(whole.weight.slice(7 * perRow, 14 * perRow));
  });

  it("converts only what is asked for", async () => {
    const { dataset } = simulated();
    const rows = await readAll(dataset, { want: "rows" });
    const weights = await readAll(dataset, { want: "weights" });
    const samples = await readAll(dataset);
    expect(rows.weight).toHaveLength(0);
    expect(weights.real).toHaveLength(0);
    expect(sameBits(weights.weight, samples.weight)).toBe(true);
    expect(sameBits(rows.u, samples.u)).toBe(true);
  });

  it("holds the same samples in either order of its rows", async () => {
    const byTime = await readAll(CLEAN.circular().dataset);
    const byBaseline = await readAll(CLEAN.baselineOrder().dataset);
    const perRow = byTime.real.length / byTime.rows;
    const keyed = (block: SampleBlock) => {
      const found = new Map<string, Float32Array>();
      for (let row = 0; row < block.rows; row++) {
        const key = `${block.time[row]} ${block.antenna1[row]} ${block.antenna2[row]}`;
        found.set(key, block.real.slice(row * perRow, (row + 1) * perRow));
      }
      return found;
    };
    const other = keyed(byBaseline);
    expect(other.size).toBe(byTime.rows);
    for (const [key, samples] of keyed(byTime)) expect(sameBits(other.get(key)!, samples)).toBe(true);
    expect(byTime.time[35]).toBe(byTime.time[0]);
    expect(byTime.time[36]).toBeGreaterThan(byTime.time[0]!);
    expect(byBaseline.time[1]).toBeGreaterThan(byBaseline.time[0]!);
    expect(byBaseline.antenna2[179]).toBe(byBaseline.antenna2[0]);
  });

  it("keeps its noise when a fault is added: the difference is the fault", async () => {
    const clean = await readAll(simulated().dataset);
    const faulty = await readAll(
      withFaults([{ kind: "persistent-line", channels: "5", amplitude: "6 sigma" }]).dataset,
    );
    const changed = faulty.real.filter((re, i) => re !== clean.real[i]);
    expect(changed).toHaveLength(6480 * 2);
  });

  it("has u, v, w = position(antenna 1) - position(antenna 2) to a millimetre of its own table", async () => {
    for (const frame of ["geocentric", "local"] as const) {
      const { dataset } = simulated({ array: { frame } });
      const block = await readAll(dataset, { want: "rows" });
      const positions = new Map(dataset.array.antennas.map(({ number, position }) => [number, position!]));
      for (let row = 0; row < block.rows; row++) {
        const [a, b] = [positions.get(block.antenna1[row]!)!, positions.get(block.antenna2[row]!)!];
        const length = Math.hypot(a[0] - b[0], a[1] - b[1], a[2] - b[2]);
        const seconds = Math.hypot(block.u[row]!, block.v[row]!, block.w[row]!);
        expect(Math.abs(seconds * SPEED_OF_LIGHT - length)).toBeLessThan(1e-3);
      }
    }
  });

  it("takes fields in turn, scan by scan, with gaps between", async () => {
    const { dataset } = CLEAN.fieldsAndGaps();
    const block = await readAll(dataset, { want: "rows" });
    const changes: [number, number][] = [];
    for (let row = 1; row < block.rows; row++) {
      if (block.field[row] === block.field[row - 1]) continue;
      changes.push([block.field[row]!, Math.round((block.time[row]! - block.time[row - 1]!) * 86400)]);
    }
    // A scan of 5 min and a gap of 2: from the last centre of one to the first of the next 130 s.
    expect(changes).toEqual([
      [2, 130],
      [1, 130],
      [2, 130],
      [1, 130],
      [2, 130],
    ]);
    expect(dataset.fields.map(({ name }) => name)).toEqual(["Heron", "Wren"]);
  });

  it("numbers its antennas as the scenario says", async () => {
    const numbers = [7, 3, 300, 21];
    const layout = { kind: "ring", antennas: 4, radius: "100m" } as const;
    const { dataset } = simulated({ array: { layout, numbers } });
    const { antenna1, antenna2 } = await readAll(dataset, { want: "rows" });
    expect(new Set([...antenna1, ...antenna2])).toEqual(new Set(numbers));
    expect(dataset.array.antennas.map(({ number }) => number)).toEqual(numbers);
  });
});

describe("times of integrations", () => {
  it("are centres on a grid that single-precision dates keep exactly", async () => {
    const { dataset } = simulated({ time: { start: "2026-03-01T23:58:01.37", integration: "7.3s" } });
    const { time } = await readAll(dataset, { want: "rows" });
    const start = 61100 + (23 * 3600 + 58 * 60 + 1.37) / 86400;
    expect(Math.abs((time[0]! - start) * 86400 - 3.65)).toBeLessThan(1e-4);
    for (const mjd of time) {
      const fraction = mjd - 61100;
      const coarse = Math.fround(fraction);
      expect(coarse + Math.fround(fraction - coarse)).toBe(fraction);
      expect(mjd + 2400000.5 - 2400000.5).toBe(mjd);
    }
  });
});

describe("rows", () => {
  it("are left out of gaps, for all baselines or an antenna's", async () => {
    const gap = withFaults([{ kind: "missing-rows", time: ["10min", "16min"] }]).dataset;
    const lost = withFaults([{ kind: "missing-rows", time: ["10min", "16min"], antennas: [4] }]).dataset;
    expect(gap.rows).toBe((180 - 36) * 36);
    expect(lost.rows).toBe(180 * 36 - 36 * 8);
    const { time, antenna1, antenna2 } = await readAll(lost, { want: "rows" });
    const start = 61100.5;
    for (let row = 0; row < lost.rows; row++) {
      const minutes = (time[row]! - start) * 1440;
      if (minutes < 10 || minutes > 16) continue;
      expect([antenna1[row], antenna2[row]]).not.toContain(4);
    }
  });

  it("may come twice, in either order of rows, the copy right after and the same", async () => {
    for (const order of ["time-baseline", "baseline-time"] as const) {
      const { dataset, truth } = withFaults([{ kind: "duplicate-rows", time: ["10min", "11min"] }], {
        order,
      });
      expect(dataset.rows).toBe(6480 + 6 * 36);
      const block = await readAll(dataset);
      const mask = truth.mask({ firstRow: 0, rows: dataset.rows }, 0);
      const perRow = mask.length / dataset.rows;
      let copies = 0;
      for (let row = 1; row < dataset.rows; row++) {
        const copy = (["time", "antenna1", "antenna2"] as const).every(
          (column) => block[column][row] === block[column][row - 1],
        );
        expect(mask[row * perRow]).toBe(copy ? 1 : 0);
        if (!copy) continue;
        copies += 1;
        const samples = (of: number) => block.real.slice(of * perRow, (of + 1) * perRow);
        expect(samples(row)).toEqual(samples(row - 1));
      }
      expect(copies).toBe(216);
    }
  });

  it("may be written last integration first", async () => {
    const { dataset } = withFaults([{ kind: "reversed-rows", time: ["10min", "11min"] }]);
    const { time } = await readAll(dataset, { want: "rows" });
    let steps = 0;
    for (let row = 1; row < dataset.rows; row++) steps += time[row]! < time[row - 1]! ? 1 : 0;
    expect(steps).toBe(5);
    expect([...time].sort((a, b) => a - b)).toEqual([
      ...(await readAll(simulated().dataset, { want: "rows" })).time,
    ]);
  });
});
