import { mkdir, mkdtemp, rm, symlink, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { loadRules, parseRule } from "../../src/rules/load.ts";
import { InputError } from "../../src/util/errors.ts";
import { rule, ruleText } from "./support.ts";

function lineOf(text: string): string {
  try {
    parseRule(text, "r.yaml");
  } catch (error) {
    if (error instanceof InputError) return error.line;
    throw error;
  }
  throw new Error("it was let through");
}

describe("a rule file", () => {
  it("becomes a rule with its expressions parsed", () => {
    const read = rule({ where: "d.flagged > 0", sources: "[A paper 1999, another 2001]" });
    expect(read).toMatchObject({ id: "made-up", weight: 0.5, each: "antenna", from: "made-up.yaml" });
    expect(read.where?.text).toBe("d.flagged > 0");
    expect(read.limits.hold.root).toEqual({ kind: "number", value: 0.6 });
    expect(read.sources).toEqual(["A paper 1999", "another 2001"]);
  });

  it.each([
    [
      "an unknown key",
      ruleText({ weigth: "1" }),
      'line 14, column 1: unknown key "weigth": did you mean "weight"?',
    ],
    ["a key missing", ruleText({ title: null }), "title is missing"],
    [
      "an unknown family",
      ruleText({ family: "wterm" }),
      'line 2, column 9: family is "wterm": did you mean "w-term"?',
    ],
    ["an unknown suggestion", ruleText({ suggests: "flags" }), 'suggests is "flags": did you mean "flag"?'],
    ["an unknown kind of row", ruleText({ each: "antena" }), 'each is "antena": did you mean "antenna"?'],
    ["a limit too many", ruleText({ limits: "{ caution: 1, hold: 2, stop: 3 }" }), 'unknown key "stop"'],
    [
      "limits that are the same",
      ruleText({ limits: "{ caution: 1, hold: 1 }" }),
      "caution and hold are both 1",
    ],
    ["a weight above 1", ruleText({ weight: "1.5" }), "line 10, column 9: weight is 1.5"],
    ["a weight in words", ruleText({ weight: "much" }), 'weight is "much"'],
    ["no source", ruleText({ sources: "[]" }), "sources is a list"],
    ["an id with a path in it", ruleText({ id: "../x" }), "id is"],
    [
      "a list as an expression",
      ruleText({ limits: "{ caution: [1], hold: 2 }" }),
      "limits.caution is a list",
    ],
    ["a list for a rule", "- 1\n- 2\n", "a rule is a list"],
    ["a text for a rule", "hello", 'a rule is "hello"'],
    ["an empty file", "", "a rule is null"],
  ])("with %s is refused with the place and the right spelling", (_, text, expected) => {
    expect(lineOf(text)).toContain(expected);
    expect(lineOf(text)).toMatch(/^r\.yaml/);
  });

  it("has the character at fault in an expression named by line and column", () => {
    // value: "d.flagged.length" is line 7; the second point is its 18th character.
    expect(lineOf(ruleText({ value: "d.flagged.length" }))).toContain("r.yaml, value, line 7, column 18: ");
    expect(lineOf(ruleText({ limits: "{ caution: plan.resolutoin, hold: 2 }" }))).toContain(
      'limits.caution, line 9, column 25: the plan has no "resolutoin": did you mean plan.resolution?',
    );
    expect(lineOf(ruleText({ value: "value + 1" }))).toContain("only its consequence can use it");
  });

  it.each([
    ["{los}", "unknown placeholder {los}"],
    ["{valu}", "did you mean {value}?"],
    ["{plan.resolutoin}", "did you mean plan.resolution?"],
    ["{d.a as parsec}", 'unknown unit "parsec"'],
    ["{d.a as fractoin}", 'did you mean "fraction"?'],
    ["{d.a", '"{" without its "}"'],
    ["d.a}", '"}" without its "{"'],
    ["{d.a.constructor}", "not expected here"],
    ["{}", "the expression ends"],
  ])("with %s in its consequence is refused", (text, expected) => {
    expect(lineOf(ruleText({ consequence: text }))).toContain(expected);
  });

  it("has an unknown measure or column named with its place and the right spelling", () => {
    expect(lineOf(ruleText({ measure: "antena" }))).toBe(
      'r.yaml, line 5, column 10: there is no measure "antena": did you mean "antenna"?',
    );
    expect(lineOf(ruleText({ value: "1 - d.flaged" }))).toBe(
      'r.yaml, value, line 7, column 15: the measure "antenna" has no column "flaged": did you mean "flagged"?',
    );
    expect(lineOf(ruleText({ consequence: "So {dataset.row as count}." }))).toContain(
      'consequence, line 11, column 27: the measure "dataset" has no column "row": did you mean "rows"?',
    );
    expect(lineOf(ruleText({ where: "d.dynamic_range > 1" }))).toContain('has no column "dynamic_range"');
  });

  it.each([
    ["two of one key", "id: a\nid: b\n"],
    ["a tag", "id: !!js/function 'x'\n"],
    ["an unknown tag", "id: !mine x\n"],
    ["an anchor", "id: &a made-up\n"],
    ["an alias", "id: &a made-up\ntitle: *a\n"],
    ["two documents", "id: a\n---\nid: b\n"],
    ["a tab for indentation", "limits:\n\tcaution: 1\n"],
    ["an open bracket", "sources: [a\n"],
    ["brackets without end", "[".repeat(30000)],
    ["maps without end", "a: ".repeat(3000)],
  ])("with %s is refused as a user's error", (_, text) => {
    expect(() => parseRule(text, "r.yaml")).toThrow(InputError);
  });

  it("keeps text that looks like an anchor inside its texts", () => {
    expect(rule({ title: '"R & D * 2: &c *d"' }).title).toBe("R & D * 2: &c *d");
  });
});

describe("loadRules", () => {
  let folder: string;
  beforeEach(async () => {
    folder = await mkdtemp(join(tmpdir(), "rules-"));
  });
  afterEach(async () => {
    await rm(folder, { recursive: true });
  });

  it("adds the user's rules to ours, from folders within folders", async () => {
    await mkdir(join(folder, "deep"));
    await writeFile(join(folder, "deep", "a.yml"), ruleText());
    await writeFile(join(folder, "notes.txt"), "not a rule");
    const ours = await loadRules();
    const both = await loadRules([folder]);
    expect(both.rules).toHaveLength(ours.rules.length + 1);
    expect(both.rules.find((one) => one.id === "made-up")?.from).toBe(join(folder, "deep", "a.yml"));
    expect(both.rules.filter((one) => one.id !== "made-up").every((one) => one.from === "ours")).toBe(true);
  });

  it("replaces ours by the same id, and a later folder an earlier one", async () => {
    const [first] = (await loadRules()).rules;
    await mkdir(join(folder, "1"));
    await mkdir(join(folder, "2"));
    await writeFile(join(folder, "1", "a.yaml"), ruleText({ id: first!.id, weight: "0.125" }));
    await writeFile(join(folder, "2", "a.yaml"), ruleText({ id: first!.id, weight: "0.25" }));
    const { rules } = await loadRules([join(folder, "1"), join(folder, "2")]);
    expect(rules.filter((one) => one.id === first!.id).map((one) => one.weight)).toEqual([0.25]);
  });

  it("switches a rule off by its id alone, and says so", async () => {
    const [first] = (await loadRules()).rules;
    const file = join(folder, "off.yaml");
    await writeFile(file, `id: ${first!.id}\nenabled: false\n`);
    const set = await loadRules([file]);
    expect(set.rules.some((one) => one.id === first!.id)).toBe(false);
    expect(set.off).toEqual([{ id: first!.id, from: file }]);
  });

  it("refuses to switch off what is not there", async () => {
    const [first] = (await loadRules()).rules;
    await writeFile(join(folder, "off.yaml"), `id: ${first!.id}x\nenabled: false\n`);
    await expect(loadRules([folder])).rejects.toMatchObject({
      advice: `Did you mean "${first!.id}"?`,
      place: { line: 1 },
    });
  });

  it("refuses two files of one folder with the same id", async () => {
    await writeFile(join(folder, "a.yaml"), ruleText());
    await writeFile(join(folder, "b.yaml"), ruleText());
    await expect(loadRules([folder])).rejects.toThrow('rule "made-up" is also in');
  });

  it("refuses a folder that is not there, one without rules, a huge file and one that is no text", async () => {
    await expect(loadRules([join(folder, "none")])).rejects.toThrow("no such folder");
    await expect(loadRules([folder])).rejects.toThrow("no rule files");
    await writeFile(join(folder, "a.yaml"), `# ${"x".repeat(70000)}`);
    await expect(loadRules([folder])).rejects.toThrow("at most 65536");
    await writeFile(join(folder, "a.yaml"), Buffer.from([0xff, 0xfe, 0x00]));
    await expect(loadRules([folder])).rejects.toThrow("not UTF-8 text");
  });

  it("does not follow links round in a circle", async () => {
    await writeFile(join(folder, "a.yaml"), ruleText());
    await symlink(folder, join(folder, "loop"));
    expect((await loadRules([folder])).rules.some((one) => one.id === "made-up")).toBe(true);
  });
});
