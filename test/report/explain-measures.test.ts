import { describe, expect, it } from "vitest";
import { explainMeasure, explainMeasures } from "../../src/report/explain-measures.ts";
import { KNOWN_MEASURES } from "../../src/rules/catalogue.ts";

const options = { width: 80, colour: false };

describe("explaining measures", () => {
  it("lists every measure with its title", () => {
    const text = explainMeasures(options);
    for (const name of KNOWN_MEASURES.keys()) expect(text).toMatch(new RegExp(`^  ${name} `, "m"));
  });

  it.each([...KNOWN_MEASURES.keys()])("says what each column of %s means, within the width", (name) => {
    const lines = explainMeasure(name, options).split("\n");
    for (const { name: column } of KNOWN_MEASURES.get(name)!.columns) {
      expect(lines.some((line) => line.startsWith(`  ${column} `))).toBe(true);
    }
    expect(Math.max(...lines.map((line) => line.length))).toBeLessThanOrEqual(80);
  });

  it("gives the right spelling of a near miss", () => {
    expect(() => explainMeasure("antena", options)).toThrow('there is no measure "antena"');
  });
});
