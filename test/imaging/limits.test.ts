import { describe, expect, it } from "vitest";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import { type DetectedEvent, EVENT_KINDS } from "../../src/detect/event.ts";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { observedArray, threeArms } from "./observed-array.ts";

const { survey } = observedArray({ antennas: threeArms(900, 3), integrations: 10, amplitude: 2 });
const plan = derivePlan({ dynamicRange: 1000 }, survey);

function event(part: Partial<DetectedEvent>): DetectedEvent {
  return {
    kind: "phase-jump",
    cause: "antenna",
    scope: { ...EVERYTHING, antennas: [3] },
    flag: null,
    size: 10,
    sizeError: 1,
    unit: "deg",
    significance: 10,
    confidence: 1,
    samples: 100,
    outlying: 100,
    evidence: "",
    repair: null,
    ...part,
  };
}

async function limitsOf(...events: DetectedEvent[]) {
  const { image, measures } = await forecast(survey, plan, { events });
  const rows = measures.find(({ name }) => name === "limit")!.table.objects() as Record<
    string,
    number | string
  >[];
  return { limits: image.limits, rows };
}

describe("limits by events", () => {
  it("have one for every kind that spoils a point source, and none for the others", async () => {
    const sizes: Record<string, number> = {
      "gain-step": 1.2,
      "weak-antenna": 0.5,
      "hand-off": 0.4,
      "delay-slope": 20,
    };
    const harmless = ["noisy", "exchanged-hands", "weight-mismatch"];
    const { rows } = await limitsOf(...EVENT_KINDS.map((kind) => event({ kind, size: sizes[kind] ?? 10 })));
    const limited = new Set(
      rows.map(({ event: place }) => Number(place)).filter((place) => !Number.isNaN(place)),
    );
    EVENT_KINDS.forEach((kind, place) => {
      expect(limited.has(place), kind).toBe(!harmless.includes(kind));
    });
  });

  it("are ranked worst first, noise among them", async () => {
    const { limits, rows } = await limitsOf(
      event({ size: 2 }),
      event({ size: 40 }),
      event({ kind: "silent-antenna" }),
    );
    const ranges = limits.map(({ dynamicRangeFraction }) => dynamicRangeFraction);
    expect(ranges).toEqual([...ranges].sort((a, b) => a - b));
    expect(limits.map(({ cause }) => cause)).toContain("thermal-noise");
    expect(rows[0]!.event).toBe(2);
    expect(rows[0]!.antenna).toBe(3);
    expect(Number(rows[0]!.ratio)).toBeCloseTo(1000 / ranges[0]!, 9);
  });

  it("halve when the error doubles, and grow when fewer samples carry it", async () => {
    const cap = async (part: Partial<DetectedEvent>) =>
      (await limitsOf(event(part))).limits.find(({ cause }) => cause === "phase-jump")!.dynamicRangeFraction;
    const small = await cap({ size: 2 });
    expect((await cap({ size: 4 })) / small).toBeCloseTo(0.5, 3);
    const time = [survey.times[0]!, survey.times[4]!] as const;
    expect(await cap({ size: 2, scope: { ...EVERYTHING, antennas: [3], time } })).toBeGreaterThan(
      1.3 * small,
    );
    expect(await cap({ size: 2, scope: { ...EVERYTHING, baselines: [[3, 4]] } })).toBeGreaterThan(2 * small);
  });

  it("of errors that each sample has on its own add in squares", async () => {
    const natural = derivePlan({ dynamicRange: 1000, weighting: { kind: "natural" } }, survey);
    const lone = event({
      kind: "lone-samples",
      size: 8,
      unit: "sigma",
      scope: EVERYTHING,
      samples: 1000,
      outlying: 10,
    });
    const { image } = await forecast(survey, natural, { events: [lone] });
    const cap = image.limits.find(({ cause }) => cause === "lone-samples")!.dynamicRangeFraction;
    // 10 samples of 1000 with 8 x 0.5 Jy on a source of 2 Jy, noise taken out: rms 10^1/2 excess / (2^1/2 1000).
    const source = Math.sqrt(4 - 2 * Math.LN2 * 0.25);
    expect(cap / ((Math.SQRT2 * 1000) / (((8 * 0.5) / source) * Math.sqrt(10)))).toBeCloseTo(1, 3);
  });

  it("say what and where in words without hostile text", async () => {
    const { limits } = await limitsOf(
      event({ size: 25, evidence: "<script>" }),
      event({ kind: "persistent-line", size: 8, scope: { ...EVERYTHING, channels: [[1, 2]] } }),
      event({ kind: "closure", scope: { ...EVERYTHING, baselines: [[2, 6]] } }),
    );
    const texts = limits.map(({ text }) => text).join("\n");
    expect(texts).toContain("phase jump on antenna 3: a phase error of 25 degrees allows a dynamic range of");
    expect(texts).toContain("persistent line on channel 1-2: interference of 8 sigma");
    expect(texts).toContain("correlator error on baseline 2-6");
    expect(texts).not.toContain("<");
  });

  it("have none for an event on samples that the image does not use", async () => {
    const { limits } = await limitsOf(event({ scope: { ...EVERYTHING, antennas: [99] } }));
    expect(limits.map(({ cause }) => cause)).toEqual(["thermal-noise"]);
  });
});
