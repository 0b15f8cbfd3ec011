import { describe, expect, it } from "vitest";
import { derivePlan, weightingName } from "../../src/imaging/derive-plan.ts";
import { InputError } from "../../src/util/errors.ts";
import { observedArray, threeArms } from "./observed-array.ts";

const C = 299792458;

describe("derivePlan", () => {
  const observed = observedArray({
    antennas: threeArms(900, 3),
    integrations: 10,
    channels: 2,
    amplitude: 4,
    sigma: 0.5,
  });
  const { survey } = observed;

  it("keeps what the user gave and says so", () => {
    const plan = derivePlan(
      {
        fieldOfView: 0.02,
        resolution: 1e-4,
        largestScale: 2e-3,
        targetRms: 1e-5,
        dynamicRange: 4000,
        dishDiameter: 13.5,
        weighting: { kind: "uniform" },
        correctsW: true,
        purpose: "line",
        lineChannels: [{ subband: 0, channels: [0, 1] }],
        expectedSefd: 420,
      },
      survey,
    );
    for (const value of Object.values(plan)) expect(value.origin).toBe("given");
    expect(plan.fieldOfView.value).toBe(0.02);
    expect(plan.lineChannels.value).toEqual([{ subband: 0, channels: [0, 1] }]);
  });

  it("takes the field from the primary beam of the dishes and says how", () => {
    const { fieldOfView, dishDiameter } = derivePlan({}, survey);
    expect(dishDiameter).toMatchObject({ value: 25, origin: "file" });
    expect(fieldOfView.value).toBeCloseTo((1.13 * C) / 1.4005e9 / 25, 9);
    expect(fieldOfView.origin).toBe("derived");
    expect(fieldOfView.how).toBe("primary beam, 1.13 lambda/D of the 25 m antennas at 1.4 GHz");
  });

  it("takes the field from the resolution where no diameter is known", () => {
    const without = observedArray({ antennas: threeArms(900, 3), integrations: 4, diameter: null });
    const { fieldOfView, dishDiameter, resolution } = derivePlan({}, without.survey);
    expect(dishDiameter.value).toBeNull();
    expect(fieldOfView.value).toBeCloseTo(100 * resolution.value, 12);
  });

  it("takes resolution and largest scale from the longest and shortest usable baselines", () => {
    let [longest, shortest] = [0, Number.POSITIVE_INFINITY];
    for (const { u, v } of observed.rows) {
      longest = Math.max(longest, Math.hypot(u, v) * observed.frequencies[1]!);
      shortest = Math.min(shortest, Math.hypot(u, v) * observed.frequencies[0]!);
    }
    const plan = derivePlan({}, survey);
    expect(plan.resolution.value * longest).toBeCloseTo(1, 9);
    expect(plan.largestScale.value * shortest).toBeCloseTo(0.6, 9);
  });

  it("leaves flagged samples and antennas at one place out of the scales", () => {
    const antennas = threeArms(900, 3);
    antennas.push([...antennas[0]!], [20_000, 0, 0]);
    const far = observedArray({
      antennas,
      integrations: 4,
      weight: ({ antenna2 }) => (antenna2 === 11 ? -1 : 1),
    });
    const plan = derivePlan({}, far.survey);
    expect(1 / plan.resolution.value).toBeLessThan(2000 / (C / 1.4e9));
    expect(plan.largestScale.value).toBeLessThan(0.1);
  });

  it("does not plan scales wider than the field or finer than the resolution", () => {
    const narrow = derivePlan({ fieldOfView: 5e-4 }, survey);
    expect(narrow.largestScale).toMatchObject({ value: 5e-4, origin: "derived" });
    const sparse = observedArray({
      antennas: [
        [0, 0, 0],
        [0, 1000, 0],
      ],
      integrations: 1,
    });
    const plan = derivePlan({}, sparse.survey);
    expect(plan.largestScale.value).toBe(plan.resolution.value);
  });

  it("plans the dynamic range that noise and source allow, within what imaging reaches", () => {
    const faint = observedArray({
      antennas: threeArms(900, 3),
      integrations: 4,
      amplitude: 0.001,
      sigma: 0.5,
    });
    expect(derivePlan({}, faint.survey).dynamicRange).toMatchObject({ value: 100, origin: "default" });
    const bright = observedArray({
      antennas: threeArms(900, 3),
      integrations: 4,
      amplitude: 1e4,
      sigma: 0.5,
    });
    expect(derivePlan({}, bright.survey).dynamicRange).toMatchObject({ value: 10_000, origin: "default" });
    const { dynamicRange } = derivePlan({}, survey);
    // 36 baselines, 10 integrations, 2 channels and 2 products of 0.5 Jy; half of the thermal limit of 3.96 Jy.
    const noise = 0.5 / Math.sqrt(36 * 10 * 4);
    const source = Math.sqrt(16 - 2 * Math.LN2 * 0.25);
    expect(dynamicRange.value).toBeCloseTo((0.5 * source) / noise, 3);
    expect(dynamicRange.origin).toBe("derived");
  });

  it("refuses line channels that the dataset does not have", () => {
    const ask = (subband: number, high: number) =>
      derivePlan({ lineChannels: [{ subband, channels: [0, high] }] }, survey);
    expect(() => ask(0, 2)).toThrow(InputError);
    expect(() => ask(1, 0)).toThrow("the dataset has sub-bands 0 to 0 of channels 0 to 1");
    expect(ask(0, 1).lineChannels.value).toHaveLength(1);
  });

  it("knows no scales where nothing is usable", () => {
    const nothing = observedArray({ antennas: threeArms(900, 3), integrations: 3, weight: () => 0 });
    const plan = derivePlan({}, nothing.survey);
    expect(plan.resolution.value).toBeNaN();
    expect(plan.largestScale.value).toBeNaN();
    expect(plan.resolution.how).toBe("unknown: no usable baseline");
    expect(plan.dynamicRange.value).toBe(100);
  });
});

describe("weightingName", () => {
  it("writes a weighting as plan.yaml does", () => {
    expect(weightingName({ kind: "robust", robust: -0.5 })).toBe("robust(-0.5)");
    expect(weightingName({ kind: "natural" })).toBe("natural");
  });
});
