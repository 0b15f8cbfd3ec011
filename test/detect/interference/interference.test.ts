import { describe, expect, it } from "vitest";
import { EVERYTHING } from "../../../src/dataset/selection.ts";
import { detectInterference, interferenceOf } from "../../../src/detect/interference/interference.ts";
import { secondPass } from "../../../src/detect/pass/second-pass.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import { CLEAN, FAULTY, TRAPS, withFaults } from "../../support/scenarios.ts";
import { CONTINUUM, scoreOf } from "./score.ts";

/** Wanted of interference of 5 sigma a sample and more. */
const RECALL = 0.97;
const PRECISION = 0.95;
/** Wanted of good data: samples suggested at most. */
const FALSE_ALARMS = 0.0005;

describe("detectInterference", () => {
  it.each(Object.entries(CLEAN))("finds nothing in good data: %s", async (_, make) => {
    const { events } = await scoreOf(make());
    expect(events).toEqual([]);
  });

  it.each(Object.entries(TRAPS))("suggests no flag where good data looks bad: %s", async (_, make) => {
    const { suggested } = await scoreOf(make());
    expect(suggested).toBeLessThan(FALSE_ALARMS);
  });

  it("names a channel that is hit the whole time", async () => {
    const { events, recall, precision } = await scoreOf(FAULTY.persistentLine());
    expect(events.map(({ kind }) => kind)).toEqual(["persistent-line"]);
    expect(events[0]!.flag).toEqual({ ...EVERYTHING, channels: [[5, 5]] });
    expect([recall, precision]).toEqual([1, 1]);
    // The simulated amplitude is 6 sigma of a component a sample.
    expect(Math.abs(events[0]!.size - 6)).toBeLessThan(0.5);
    expect(events[0]!.evidence).toContain("1402.250 to 1402.750 MHz");
  });

  it("names the time and the channels of a burst", async () => {
    const { events, recall, precision } = await scoreOf(FAULTY.burst());
    expect(events.map(({ kind }) => kind)).toEqual(["burst"]);
    expect(events[0]!.flag!.channels).toEqual([[3, 9]]);
    expect(events[0]!.flag!.baselines).toBeNull();
    expect([recall, precision]).toEqual([1, 1]);
  });

  it("names the short baselines when they alone are hit", async () => {
    const { events, recall, precision } = await scoreOf(FAULTY.shortBaselineBurst());
    expect(events).toHaveLength(1);
    expect(events[0]!.evidence).toContain("the shortest 12 of 36 baselines");
    expect(recall).toBeGreaterThan(RECALL);
    expect(precision).toBeGreaterThan(PRECISION);
  });

  it("follows a drifting line with few flags", async () => {
    const { events, recall, precision } = await scoreOf(FAULTY.driftingLine());
    expect(events.map(({ kind }) => kind)).toEqual(["drifting-line"]);
    expect(1 + events[0]!.alsoFlag!.length).toBeLessThanOrEqual(16);
    expect(recall).toBeGreaterThan(RECALL);
    expect(precision).toBeGreaterThan(PRECISION);
  });

  it("counts lone samples and does not flag them", async () => {
    const { events } = await scoreOf(FAULTY.loneSamples());
    expect(events.map(({ kind }) => kind)).toEqual(["lone-samples"]);
    expect(events[0]!.flag).toBeNull();
    expect(events[0]!.outlying).toBeGreaterThan(80);
  });

  it.each([2, 3, 5])("finds a burst over the whole band at %d sigma a sample", async (sigmas) => {
    const { recall, precision } = await scoreOf(
      withFaults([
        { kind: "burst", channels: "0-15", time: ["12min", "13min"], amplitude: `${sigmas} sigma` },
      ]),
    );
    expect(recall).toBeGreaterThan(RECALL);
    expect(precision).toBeGreaterThan(PRECISION);
  });

  it("finds a line of 2 sigma a sample that lasts", async () => {
    const { recall, precision } = await scoreOf(
      withFaults([{ kind: "persistent-line", channels: "11", amplitude: "2 sigma" }]),
    );
    expect([recall, precision]).toEqual([1, 1]);
  });

  it("does not flag channels that the plan protects", async () => {
    const { events } = await scoreOf(FAULTY.persistentLine(), {
      purpose: "line",
      lineChannels: [{ subband: 0, channels: [4, 6] }],
    });
    expect(events).toEqual([]);
  });

  it("reports a lasting line as a doubt where lines are looked for", async () => {
    const { events } = await scoreOf(FAULTY.persistentLine(), { purpose: "line", lineChannels: [] });
    expect(events.map(({ kind, flag }) => [kind, flag])).toEqual([["persistent-line", null]]);
  });

  it("leaves alone what is explained already", async () => {
    const { events } = await scoreOf(FAULTY.persistentLine(), CONTINUUM, [
      { ...EVERYTHING, channels: [[5, 5]] },
    ]);
    expect(events).toEqual([]);
  });

  it("finds a burst beside a silent antenna and a phase jump", async () => {
    const three = FAULTY.three();
    const { events, recall, precision } = await scoreOf(
      three,
      CONTINUUM,
      [{ ...EVERYTHING, antennas: [4] }],
      1,
    );
    expect(events.map(({ kind }) => kind)).toEqual(["burst"]);
    expect(events[0]!.flag!.channels).toEqual([[3, 9]]);
    expect(events[0]!.flag!.baselines).toBeNull();
    expect(recall).toBe(1);
    expect(precision).toBe(1);
  });

  it("finds the same whatever the blocks", async () => {
    const { dataset } = FAULTY.shortBaselineBurst();
    const blocks = dataset.blocks.bind(dataset);
    const small = { ...dataset, blocks: (r: Parameters<typeof blocks>[0]) => blocks({ ...r, blockRows: 7 }) };
    const of = async (some: typeof dataset) => detectInterference(await surveyDataset(some), CONTINUUM, []);
    expect(await of(small)).toEqual(await of(dataset));
  });

  it("finds it by sums over baselines where marks of samples are too many to keep", async () => {
    const survey = await surveyDataset(FAULTY.burst().dataset);
    const pass = { ...(await secondPass(survey)), marks: null };
    const [event, ...others] = interferenceOf(survey, pass, CONTINUUM, []);
    expect(others).toEqual([]);
    expect([event!.kind, event!.flag!.channels]).toEqual(["burst", [[3, 9]]]);
    expect(event!.samples).toBe(6048);
    expect(event!.significance).toBeGreaterThan(100);
    expect(event!.evidence).toContain("only sums over all baselines");
  });

  it("finds nothing by sums over baselines in good data", async () => {
    const survey = await surveyDataset(CLEAN.circular().dataset);
    const pass = { ...(await secondPass(survey)), marks: null };
    expect(interferenceOf(survey, pass, CONTINUUM, [])).toEqual([]);
  });

  it("names one baseline that alone is hit", async () => {
    const { events, recall, precision } = await scoreOf(
      withFaults([
        {
          kind: "burst",
          channels: "3-6",
          time: ["12min", "14min"],
          amplitude: "8 sigma",
          baselines: [[2, 6]],
        },
      ]),
    );
    expect(events.map(({ cause, flag }) => [cause, flag!.baselines])).toEqual([["baseline", [[2, 6]]]]);
    expect(recall).toBeGreaterThan(RECALL);
    expect(precision).toBeGreaterThan(PRECISION);
  });

  it("finds nothing where there is one channel", async () => {
    const { events } = await scoreOf(withFaults([], { frequency: { channels: 1 } }));
    expect(events).toEqual([]);
  });

  it("finds nothing in four channels of good data", async () => {
    const { events } = await scoreOf(withFaults([], { frequency: { channels: 4 } }));
    expect(events).toEqual([]);
  });
});
