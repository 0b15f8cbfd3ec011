import { describe, expect, it } from "vitest";
import { findingCounts, limitsText, scoreText, toDo } from "../../src/report/words.ts";
import type { Finding } from "../../src/rules/finding.ts";
import { fixtureFindings } from "./fixtures.ts";

const [wPhase, jump, interference, silent, gap] = fixtureFindings() as [
  Finding,
  Finding,
  Finding,
  Finding,
  Finding,
];

describe("toDo", () => {
  it("names the flags to accept, and says when they bring a hold back", () => {
    expect(toDo(interference)).toBe(
      "Accept suggested flag F2. With the suggested flags it is within its limits.",
    );
    expect(toDo({ ...interference, severity: 1 })).toBe(
      "Accept suggested flag F2. As the data are it is past its hold limit; with the suggested flags it is not.",
    );
    expect(toDo({ ...interference, flags: ["F2", "F4"], mendedByFlags: false })).toBe(
      "Accept suggested flags F2, F4.",
    );
  });

  it("prefers a repair to a flag where there is one", () => {
    expect(toDo(jump)).toMatch(/^Calibrate it out.*suggested flag F1 would remove it\. As the data are/);
  });

  it("does not speak of flags where none helps", () => {
    expect(toDo(gap)).not.toMatch(/suggested/);
    expect(toDo(wPhase)).toContain("correct the w term");
  });

  it("counts flags that are too many to name", () => {
    const flags = Array.from({ length: 9 }, (_, i) => `F${i + 1}`);
    expect(toDo({ ...interference, flags })).toContain("F1, F2, F3, F4, F5 and 4 more");
  });
});

describe("limitsText", () => {
  it("says on which side of the limits the trouble lies", () => {
    expect(limitsText(jump).limits).toBe("caution above 3.1 deg, hold above 31 deg");
    expect(limitsText(silent).limits).toBe("caution below 50 %, hold below 0 %");
  });
});

describe("scoreText", () => {
  it("rounds once and stays between 0 and 100", () => {
    expect([46.2, 49.5, -3, 104, Number.NaN].map(scoreText)).toEqual(["46", "50", "0", "100", "unknown"]);
  });
});

describe("findingCounts", () => {
  it("counts holds and cautions in words", () => {
    expect(findingCounts(fixtureFindings())).toBe("1 hold, 4 cautions");
    expect(findingCounts([])).toBe("nothing that cautions or holds");
  });
});
