import { table } from "arquero";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { arqueroText, FUNCTION_NAMES, parseExpression } from "../../src/rules/expression.ts";
import { ExpressionError } from "../../src/rules/expression-error.ts";

const row = { a: [2], b: [3], s: ["line"] };

/** What arquero makes of an expression over one row. */
function evaluated(text: string): unknown {
  const { root } = parseExpression(text);
  const code = arqueroText(root, (_, name) => `d[${JSON.stringify(name)}]`);
  return table(row).derive({ out: code }).get("out", 0);
}

function refusal(text: string): ExpressionError {
  try {
    parseExpression(text);
  } catch (error) {
    if (error instanceof ExpressionError) return error;
    throw error;
  }
  throw new Error(`${text} was let through`);
}

describe("an expression", () => {
  it.each([
    ["1 + 2 * 3", 7],
    ["(1 + 2) * 3", 9],
    ["2 ** 3 ** 2", 512],
    ["-d.a ** 2", 4],
    ["10 - 4 - 3", 3],
    ["7 % 4", 3],
    [".5 + 1.e1 + 2E-1", 10.7],
    ["d.a < d.b && d.b >= 3 || false", true],
    ["!(d.a == 2)", false],
    ["d.s == 'line' ? 1 : 2", 1],
    ['d.s != "line" ? 1 : d.a > 1 ? 5 : 6', 5],
    ["d.a == '2'", false],
    ["op.sqrt(d.a * 2) + op.least(5, d.b, 1)", 3],
    ["op.cos(PI)", -1],
    ["+d.a", 2],
  ])("means by %s what JavaScript does, but for texts, which never equal numbers", (text, expected) => {
    const value = evaluated(text);
    if (typeof expected === "number") expect(value).toBeCloseTo(expected, 12);
    else expect(value).toBe(expected);
  });

  it.each(FUNCTION_NAMES)("may call op.%s, which arquero knows", (name) => {
    const two = ["atan2", "pow"].includes(name);
    const value = evaluated(`op.${name}(0.5${two ? ", 0.25" : ""})`);
    expect(["number", "boolean"]).toContain(typeof value);
    expect(value).not.toBeNaN();
  });

  it.each([
    // Property chains, which arquero lets through.
    "d.a.constructor",
    "d.s.__proto__",
    "d.constructor",
    "d.__proto__",
    "d.hasOwnProperty",
    "plan.constructor",
    "op.abs.constructor(1)",
    "(d.a).constructor",
    "d.s.length",
    'd["a"]',
    "d[0]",
    // Functions that take a stranger's time or memory, or are not arithmetic.
    "op.replace(d.s, /(a+)+$/, '')",
    "op.padstart(d.s, 1e9)",
    "op.repeat(d.s, 1e9)",
    "op.match(d.s, 'a')",
    "op.parse_json('{}')",
    "op.sequence(0, 1e9)",
    "op.random()",
    "op.mean(d.a)",
    "op.lag(d.a)",
    // JavaScript.
    "process.exit(1)",
    "globalThis",
    "this",
    "eval('1')",
    "Function('return 1')()",
    "import('node:fs')",
    "require('node:fs')",
    "() => 1",
    "d => d.a",
    "function () {}",
    "new Date()",
    "d.a = 1",
    "d.a++",
    "d.a; d.b",
    "d.a, d.b",
    "[1, 2]",
    "{ a: 1 }",
    "`x`",
    ["`$", "{d.a}`"].join(""),
    "/a/",
    "d.a ?? 1",
    "d?.a",
    "d.a & 1",
    "~d.a",
    "typeof d.a",
    "delete d.a",
    "void 0",
    "...d.a",
    "undefined",
    "null",
    "Infinity",
    "NaN",
    "$.a",
    "Math.max(1, 2)",
    "sqrt(2)",
    "d",
    "op",
    "\\u0064.a",
    "'a\\'b'",
    // Texts are for comparing.
    "'abc'",
    "'a' + 'b'",
    "d.s + 'b'",
    "'a' * 1e9",
    "op.abs('1')",
    "true ? 'a' : 'b'",
    "'a' < d.s",
    // Not whole.
    "",
    "  ",
    "1 +",
    "(1",
    "1)",
    "op.abs()",
    "op.abs(1, 2)",
    "op.abs(1,)",
    "d.",
    "1e999",
    "1 2",
    "d.a ? 1",
    "'open",
  ])("refuses %s and says where", (text) => {
    const error = refusal(text);
    expect(error.message).not.toBe("");
    expect(error.at).toBeGreaterThanOrEqual(0);
    expect(error.at).toBeLessThanOrEqual(text.length);
  });

  it("gives the right spelling of a plan key, a function and a forgotten op", () => {
    expect(refusal("plan.dynamicrange").message).toContain("did you mean plan.dynamic_range?");
    expect(refusal("op.sqr(2)").message).toContain("did you mean op.sqrt?");
    expect(refusal("1 + sqrt(2)")).toMatchObject({ message: expect.stringContaining("op.sqrt"), at: 4 });
  });

  it("refuses what is nested or written without end, quickly", () => {
    for (const text of ["(".repeat(900), "-".repeat(1900), `${"2**".repeat(600)}2`, "1+".repeat(5000)]) {
      expect(() => parseExpression(text)).toThrow(ExpressionError);
    }
    expect(refusal(`${"true?1:".repeat(200)}1`).message).toContain("nested");
  });

  it("names what it reads", () => {
    const { names } = parseExpression("d.a + plan.resolution * dataset.antennas + value");
    expect(names).toEqual([
      { source: "d", name: "a", at: 2 },
      { source: "plan", name: "resolution", at: 11 },
      { source: "dataset", name: "antennas", at: 32 },
      { source: "value", name: "value", at: 43 },
    ]);
  });

  it("either parses or is refused, whatever is written", () => {
    const word = fc.constantFrom(
      "d.",
      "a",
      "(",
      ")",
      "op.",
      "abs",
      "+",
      "-",
      "?",
      ":",
      "1",
      "'x'",
      ".",
      " ",
      "**",
      "plan.",
    );
    const texts = fc.oneof(
      fc.string({ maxLength: 40 }),
      fc.array(word, { maxLength: 30 }).map((words) => words.join("")),
    );
    fc.assert(
      fc.property(texts, (text) => {
        try {
          parseExpression(text);
        } catch (error) {
          expect(error).toBeInstanceOf(ExpressionError);
        }
      }),
      { numRuns: 2000 },
    );
  });
});
