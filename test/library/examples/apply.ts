/** Check, write the flags and tables, accept one of the flags, and see what the copy is worth. */
import { join } from "node:path";
import {
  applyFlags,
  check,
  chooseFlags,
  loadRules,
  openDataset,
  readFlags,
  readPlan,
  survey,
  writeFlags,
  writeReports,
  writeTables,
} from "visvet";

const [path = "night12.uvfits", planned = "plan.yaml", folder = "."] = process.argv.slice(2);
const dataset = await openDataset(path);
const result = await check(dataset, { plan: await readPlan(planned), rules: await loadRules() });
await writeReports(result, folder);
await writeFlags(result, folder, ["csv", "idi"]);
await writeTables(result, folder, "parquet");

const { flags } = await readFlags(join(folder, "flags.csv"));
const { chosen, skipped } = chooseFlags(flags, ["F1"], []);
const out = join(folder, "flagged.uvfits");
const { counts } = await applyFlags({ dataset, flags: chosen, out, named: [path] });
console.log(
  `${counts.union.unflagged} samples flagged; left for later: ${skipped.map(({ id }) => id).join(" ")}`,
);

const { totals } = await survey(await openDataset(out));
console.log(`${totals.flagged} of ${totals.samples} samples of the copy are flagged`);
