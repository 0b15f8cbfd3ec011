import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { LEAST_CONFIDENCE, whyNotWorth } from "../../src/flags/worth.ts";

const worth = { confidence: 0.9, severity: 0.5, excess: null, sensitivityLoss: 0.1 };

describe("whyNotWorth", () => {
  it("wants the predicted image better without the samples, where the harm has a number", () => {
    // sqrt(1 + 1) (1 - 0.29) = 1.004; at a loss of 0.30, 0.990.
    expect(whyNotWorth({ ...worth, excess: 1, sensitivityLoss: 0.29 })).toBeNull();
    expect(whyNotWorth({ ...worth, excess: 1, sensitivityLoss: 0.3 })).toContain(
      "more sensitivity than the fault",
    );
    expect(whyNotWorth({ ...worth, severity: 0, excess: 0.01, sensitivityLoss: 0.001 })).toContain(
      "within all limits",
    );
  });

  it("takes samples for nothing when they cost nothing", () => {
    expect(whyNotWorth({ ...worth, severity: 0, excess: 0, sensitivityLoss: 0 })).toBeNull();
  });

  it("lets a worse finding cost more, where the harm has no number", () => {
    expect(whyNotWorth({ ...worth, severity: 0, sensitivityLoss: 0.009 })).toBeNull();
    expect(whyNotWorth({ ...worth, severity: 0, sensitivityLoss: 0.02 })).not.toBeNull();
    expect(whyNotWorth({ ...worth, severity: 0.5 })).toBeNull();
    expect(whyNotWorth({ ...worth, severity: 1, sensitivityLoss: 0.5 })).toBeNull();
    expect(whyNotWorth({ ...worth, severity: 1, sensitivityLoss: 0.7 })).not.toBeNull();
  });

  it("takes nothing that may as well be sky", () => {
    expect(whyNotWorth({ ...worth, excess: 100, confidence: LEAST_CONFIDENCE - 0.01 })).toContain("sky");
    expect(whyNotWorth({ ...worth, excess: 100, confidence: Number.NaN })).toContain("sky");
  });

  it("never finds a dearer flag worth it when a cheaper one of the same fault is not", () => {
    const share = fc.double({ min: 0, max: 0.99, noNaN: true });
    const excess = fc.option(fc.double({ min: 0, max: 10, noNaN: true }));
    fc.assert(
      fc.property(share, share, share, excess, (severity, a, b, added) => {
        const of = (sensitivityLoss: number) =>
          whyNotWorth({ confidence: 1, severity, excess: added, sensitivityLoss });
        if (of(Math.min(a, b)) !== null) expect(of(Math.max(a, b))).not.toBeNull();
      }),
    );
  });
});
