/** One call: can this data give the planned image, and what spoils it? */
import { check, InputError, loadRules, openDataset, parsePlan } from "visvet";

const path = process.argv[2] ?? "night12.uvfits";
try {
  const dataset = await openDataset(path);
  const plan = parsePlan("dynamic_range: 1000\ncorrects_w: yes\n", "plan");
  const result = await check(dataset, { plan, rules: await loadRules() });
  console.log(`${dataset.name}: ${result.verdict}, score ${Math.round(result.before.score)}`);
  for (const { id, rule, fraction } of result.flags) {
    console.log(`${id} ${rule} ${(100 * fraction).toFixed(1)} %`);
  }
} catch (error) {
  if (!(error instanceof InputError)) throw error;
  console.error(error.line);
  process.exitCode = 2;
}
