/** `visvet explain`: the rules in force, or one in full. */
import type { CommandModule } from "yargs";

interface ExplainArguments {
  rule: string | undefined;
  rules: string[] | undefined;
}

export const explain: CommandModule<object, ExplainArguments> = {
  command: "explain [rule]",
  describe: "Show the rules in force, or one in full: question, limits, consequence, sources",
  builder: (yargs) =>
    yargs
      .example("$0 explain", "every rule with its limits, by family")
      .example("$0 explain phase-jump", "one rule in full")
      .example("$0 explain --rules my-rules", "with the rules of a folder added")
      .positional("rule", { type: "string", describe: "The id of a rule" })
      .option("rules", {
        type: "string",
        array: true,
        requiresArg: true,
        describe: "Folders of rule files that add to ours, or replace them by id",
      }) as never,
  handler: async ({ rule, rules }) => {
    const { default: chalk } = await import("chalk");
    const { loadRules } = await import("../rules/load.ts");
    const { explainRule, explainRules } = await import("../report/explain.ts");
    const set = await loadRules(rules ?? []);
    const options = { width: process.stdout.columns ?? 80, colour: chalk.level > 0 };
    process.stdout.write(rule === undefined ? explainRules(set, options) : explainRule(set, rule, options));
  },
};
