import { describe, expect, it } from "vitest";
import { InputError, nearest } from "../../src/util/errors.ts";

describe("InputError", () => {
  it("prints what, where and what to do as one line", () => {
    const error = new InputError(
      "expected T, found F",
      { file: "a.uvfits", part: "HDU 1", byte: 80 },
      "Copy it again",
    );
    expect(error.line).toBe("a.uvfits, HDU 1, byte 80: expected T, found F. Copy it again");
  });

  it("prints a place in a text file by line and column", () => {
    expect(new InputError("unknown key", { file: "plan.yaml", line: 3, column: 5 }).line).toBe(
      "plan.yaml, line 3, column 5: unknown key",
    );
  });

  it("prints the bare message when there is no place", () => {
    expect(new InputError("no dataset given").line).toBe("no dataset given");
  });
});

describe("nearest", () => {
  // Damerau 1964: "wterm" is one insertion from "w-term", "chekc" one swap of neighbours from "check".
  it("gives the right spelling of a near miss", () => {
    expect(nearest("wterm", ["coverage", "w-term", "weights"])).toBe("w-term");
    expect(nearest("chekc", ["check", "describe"])).toBe("check");
  });

  it("gives nothing when no word is near", () => {
    expect(nearest("banana", ["coverage", "w-term"])).toBeUndefined();
  });
});
