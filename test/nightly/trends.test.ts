import { describe, expect, it } from "vitest";
import { limitsFor } from "../../src/nightly/charts/control-charts.ts";
import type { Series } from "../../src/nightly/history/store.ts";
import { trendMeasure } from "../../src/nightly/measures.ts";
import { alarmsOf, NIGHTS_TO_FALSE_ALARM, trendsOf } from "../../src/nightly/trends.ts";
import { alarmText, recurrenceText } from "../../src/nightly/words.ts";
import { Random } from "../../src/simulate/random.ts";
import { FIRST_NIGHT, nightOf, record } from "./synthetic.ts";

const AMPLITUDE = trendMeasure("antenna", "amplitude_ratio")!;
const SERIES = 100;
const NIGHTS = 300;
const limits = limitsFor(NIGHTS_TO_FALSE_ALARM * SERIES);

function series(values: readonly number[], nights = values.map((_, i) => nightOf(i))): Series {
  return {
    band: "",
    kind: "antenna",
    item: "A07",
    measure: "amplitude_ratio",
    nights,
    values: Float64Array.from(values),
  };
}

/** ln of amplitudes with a noise of 1 %. */
function drawn(seed: number, nights: number, of: (night: number) => number): number[] {
  const random = Random.of(seed, nights);
  return Array.from({ length: nights }, (_, night) => of(night) + 0.01 * random.normal());
}

describe("nights that do not change", () => {
  const shapes: Record<string, (random: Random) => number> = {
    normal: (random) => random.normal(),
    even: (random) => random.uniform(),
    "one-sided": (random) => -Math.log(1 - random.uniform()),
    "heavy-tailed": (random) => Math.tan(Math.PI * (random.uniform() - 0.5)),
  };

  it.each(Object.keys(shapes))("give no more false alarms than the charts promise: %s", (shape) => {
    const repeats = 5;
    let alarms = 0;
    for (let s = 0; s < SERIES * repeats; s++) {
      const random = Random.of(20260101, s, shape.length);
      const values = Array.from({ length: NIGHTS }, () => 0.05 * shapes[shape]!(random));
      alarms += alarmsOf(series(values), { ...AMPLITUDE, least: 0 }, limits).length;
    }
    const promised = (NIGHTS / NIGHTS_TO_FALSE_ALARM) * repeats;
    // Three standard deviations of a Poisson number.
    expect(alarms).toBeLessThan(promised + 3 * Math.sqrt(promised));
  });
});

describe("an antenna that loses 1 % a night", () => {
  const start = 60;
  const results = Array.from({ length: 40 }, (_, seed) => {
    const values = drawn(seed + 1, 90, (night) => Math.log(0.99) * Math.max(0, night - start + 1));
    return alarmsOf(series(values), AMPLITUDE, limits);
  });

  it("is called within a fortnight, before it has lost a seventh", () => {
    for (const [alarm] of results) {
      expect(alarm!.called > nightOf(start)).toBe(true);
      expect(alarm!.called <= nightOf(start + 14)).toBe(true);
    }
  });

  it("is called a drift of that size, since about then", () => {
    const right = results.filter(([alarm]) => {
      const { change, since } = alarm!;
      const late = Math.abs(Date.parse(since) - Date.parse(nightOf(start))) / 86_400_000;
      return change.kind === "drift" && Math.abs(change.size - Math.log(0.99)) < 0.004 && late <= 4;
    });
    expect(right.length / results.length).toBeGreaterThan(0.9);
    expect(alarmText({ series: series([]), measure: AMPLITUDE, alarms: [] }, results[0]![0]!)).toMatch(
      /^antenna A07: the amplitude falls by [01]\.\d+ % a night since 2026-0[23]-\d\d$/,
    );
  });
});

describe("a step after maintenance", () => {
  it("is dated to the night", () => {
    for (let seed = 1; seed <= 40; seed++) {
      const values = drawn(seed, 80, (night) => (night >= 50 ? 0.06 : 0));
      const [alarm, ...others] = alarmsOf(series(values), AMPLITUDE, limits);
      expect(others).toEqual([]);
      expect([alarm!.before, alarm!.since, alarm!.change.kind]).toEqual([nightOf(49), nightOf(50), "step"]);
      expect(Math.abs(alarm!.change.size - 0.06)).toBeLessThan(0.015);
    }
  });

  it("is found where nights are missing", () => {
    const nights = Array.from({ length: 60 }, (_, i) => nightOf(3 * i + (i % 2)));
    const values = drawn(3, 60, (night) => (night >= 40 ? -0.1 : 0));
    expect(alarmsOf(series(values, nights), AMPLITUDE, limits)[0]!.since).toBe(nights[40]);
  });
});

describe("odd series", () => {
  it.each([
    ["all equal", Array.from({ length: 60 }, () => 0)],
    ["too short", [1, 2, 3, 4, 5]],
    ["one outlier", Array.from({ length: 60 }, (_, i) => (i === 30 ? 1e9 : Math.sin(i * i)))],
  ])("give no alarm: %s", (_, values) => {
    expect(alarmsOf(series(values), AMPLITUDE, limits)).toEqual([]);
  });

  it("are left out of the trends where they are short, and none make no fault", () => {
    expect(trendsOf([series([1, 2])], [], []).followed).toEqual([]);
    expect(trendsOf([], [], [])).toMatchObject({ followed: [], recurring: [] });
  });
});

describe("interference by the hour", () => {
  const band = record(0).band;
  const seenAt = (night: number, hour: number, hours = 0.5) => ({
    check: night,
    band,
    night: nightOf(night),
    low: 1.3945e9,
    high: 1.3965e9,
    start: FIRST_NIGHT + night + hour / 24,
    end: FIRST_NIGHT + night + (hour + hours) / 24,
  });
  const checks = Array.from({ length: 30 }, (_, night) => ({
    ...record(night, { start: FIRST_NIGHT + night + 8 / 24, end: FIRST_NIGHT + night + 20 / 24 }),
    id: night,
  }));
  const recurring = (seen: ReturnType<typeof seenAt>[]) => trendsOf([], seen, checks).recurring;

  it("that comes at the same hour is recognised, with its hour and nights", () => {
    const seen = checks.flatMap((_, night) => (night % 5 === 4 ? [] : [seenAt(night, 12.2)]));
    const [found, ...others] = recurring(seen);
    expect(others).toEqual([]);
    expect(found!.recurrence).toMatchObject({ clock: "utc", from: 12, to: 13, nights: 24, observed: 30 });
    expect(recurrenceText(found!)).toBe(
      "1.3945 GHz to 1.3965 GHz has interference from 12:00 to 13:00 UTC on 24 of the 30 nights that observed then",
    );
  });

  it("that keeps sidereal time is told apart over the weeks", () => {
    const seen = checks.map((_, night) => seenAt(night, 18 - night * (3.94 / 60), 0.3));
    expect(recurring(seen)[0]!.recurrence.clock).toBe("sidereal");
  });

  it("at any hour, or all the time, is no hour", () => {
    const random = Random.of(5, 5);
    expect(recurring(checks.map((_, night) => seenAt(night, 8 + 11 * random.uniform())))).toEqual([]);
    expect(recurring(checks.map((_, night) => seenAt(night, 8, 12)))).toEqual([]);
  });

  it("of three nights is not enough", () => {
    expect(recurring([0, 1, 2].map((night) => seenAt(night, 12)))).toEqual([]);
  });
});
