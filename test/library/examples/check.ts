/** One call: can this data give the planned image, and what spoils it? */
import { check, InputError, loadRules, openDataset, readPlan } from "visvet";

const [path = "night12.uvfits", planned = "plan.yaml"] = process.argv.slice(2);
try {
  const dataset = await openDataset(path);
  const plan = await readPlan(planned);
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
