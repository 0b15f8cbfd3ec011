/** Each stage by itself: survey the data, forecast the image, judge by the rules, suggest flags. */
import {
  derivePlan,
  detect,
  eventMeasures,
  forecast,
  judge,
  loadRules,
  type Measure,
  type Measures,
  openDataset,
  readPlan,
  suggestFlags,
  survey,
} from "visvet";

const [path = "night12.uvfits", planned = "plan.yaml"] = process.argv.slice(2);
const dataset = await openDataset(path);
const surveyed = await survey(dataset);
const plan = derivePlan(await readPlan(planned), surveyed);
const events = await detect(surveyed, { purpose: plan.purpose.value, lineChannels: plan.lineChannels.value });
const { measures: ofImage, image } = await forecast(surveyed, plan, { events });

const all: Measure[] = [...surveyed.measures.values(), ...eventMeasures(surveyed, events), ...ofImage];
const measures: Measures = new Map(all.map((measure) => [measure.name, measure]));
const rules = await loadRules();
const judged = judge(rules, measures, plan);
const { flags } = await suggestFlags({ dataset, times: surveyed.times, events, judged, rules });

// Measures are arquero tables.
const antennas = measures.get("antenna")!.table.orderby("coherence_ratio");
console.log(`least coherent: antenna ${antennas.get("antenna", 0)}`);
console.log(`capped first by: ${image.limits[0]?.cause}`);
console.log(`rules that took points: ${judged.taken.map(({ rule }) => rule).join(", ")}`);
console.log(`flags: ${flags.map(({ id }) => id).join(" ")}`);
