/** `visvet explain`: the rules in force, or one in full. */
import { command } from "./command.ts";

interface ExplainArguments {
  readonly rule: string | undefined;
  readonly rules: readonly string[] | undefined;
  /** "" asks for all of them */
  readonly measure: string | undefined;
}

export const explain = command<ExplainArguments>({
  command: "explain [rule]",
  describe: "Show the rules in force, or one in full: question, limits, consequence, sources",
  examples: [
    ["explain", "every rule with its limits, by family"],
    ["explain phase-jump", "one rule in full"],
    ["explain --rules my-rules", "with the rules of a folder added"],
    ["explain --measure antenna", "the columns that a rule may use"],
  ],
  options: (yargs) =>
    yargs
      .positional("rule", { type: "string", describe: "The id of a rule" })
      .option("rules", {
        type: "string",
        array: true,
        requiresArg: true,
        describe: "Folders of rule files that add to ours, or replace them by id",
      })
      .option("measure", {
        type: "string",
        describe: "Show a measure's columns; without a name, all measures",
      }),
  handler: async ({ rule, rules, measure }) => {
    const { default: chalk } = await import("chalk");
    const options = { width: process.stdout.columns ?? 80, colour: chalk.level > 0 };
    if (measure !== undefined) {
      const { explainMeasure, explainMeasures } = await import("../report/explain-measures.ts");
      process.stdout.write(measure === "" ? explainMeasures(options) : explainMeasure(measure, options));
      return;
    }
    const { loadRules } = await import("../rules/load.ts");
    const { explainRule, explainRules } = await import("../report/explain.ts");
    const set = await loadRules(rules ?? []);
    process.stdout.write(rule === undefined ? explainRules(set, options) : explainRule(set, rule, options));
  },
});
