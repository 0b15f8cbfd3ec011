/** A warning from Node or a library is a defect here: it fails the test that was running. */
import { afterEach, expect } from "vitest";

const warnings: string[] = [];
process.on("warning", (warning) => warnings.push(`${warning.name}: ${warning.message}`));

afterEach(() => {
  expect(warnings.splice(0)).toEqual([]);
});
