import { describe, expect, it } from "vitest";
import { fillLegendre, fillWave, momentCount, sphericalBessel } from "../../src/imaging/legendre.ts";

describe("sphericalBessel", () => {
  it("has its closed forms", () => {
    for (const x of [0.01, 0.5, 1, 2, 4]) {
      expect(sphericalBessel(0, x)).toBeCloseTo(Math.sin(x) / x, 14);
      expect(sphericalBessel(1, x)).toBeCloseTo(Math.sin(x) / x ** 2 - Math.cos(x) / x, 13);
      const second = (3 / x ** 2 - 1) * (Math.sin(x) / x) - (3 * Math.cos(x)) / x ** 2;
      // The closed form loses digits at small x.
      expect(sphericalBessel(2, x)).toBeCloseTo(second, x < 0.1 ? 8 : 12);
    }
  });

  it("is 1 or 0 at the origin and odd or even about it", () => {
    expect(sphericalBessel(0, 0)).toBe(1);
    expect(sphericalBessel(3, 0)).toBe(0);
    expect(sphericalBessel(3, -1.2)).toBe(-sphericalBessel(3, 1.2));
    expect(sphericalBessel(4, -1.2)).toBe(sphericalBessel(4, 1.2));
  });
});

describe("the expansion of a plane wave", () => {
  it("gives exp(i x t) to the accuracy that is promised", () => {
    const order = 5;
    const waves = new Float64Array(order + 1);
    const legendre = new Float64Array(order + 1);
    fillWave(0.5, order, waves);
    let squares = 0;
    const steps = 400;
    for (let k = 0; k < steps; k++) {
      const t = -1 + (2 * (k + 0.5)) / steps;
      fillLegendre(t, order, legendre);
      let [re, im] = [0, 0];
      for (let n = 0; n <= order; n++) {
        const value = waves[n]! * legendre[n]!;
        // i^n
        if (n % 2 === 0) re += (n % 4 === 0 ? 1 : -1) * value;
        else im += (n % 4 === 1 ? 1 : -1) * value;
      }
      const phase = (Math.PI / 2) * t;
      squares += (re - Math.cos(phase)) ** 2 + (im - Math.sin(phase)) ** 2;
    }
    expect(Math.sqrt(squares / steps)).toBeLessThan(4e-4);
  });

  it("keeps as many moments as total orders allow", () => {
    expect([0, 1, 2, 3, 5].map(momentCount)).toEqual([1, 3, 6, 10, 21]);
  });
});
