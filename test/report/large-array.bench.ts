/**
 * A whole check of arrays of hundreds and thousands of antennas: how long each stage takes and how large the process
 * grows, clean and with a silent antenna, whose flag takes a second look. VISVET_ANTENNAS chooses the sizes ("260 700");
 * the largest takes minutes, and the peak is that of the largest so far.
 */
import { bench, describe } from "vitest";
import { checkDataset } from "../../src/report/check.ts";
import { writeHtml } from "../../src/report/html.ts";
import { reportJson } from "../../src/report/json.ts";
import { loadRules } from "../../src/rules/load.ts";
import { largeArray } from "../support/large-array.ts";

const sizes = (process.env.VISVET_ANTENNAS ?? "260 2000").split(/[\s,]+/).map(Number);
const rules = await loadRules();

describe("check of a large array, 2 integrations of 4 channels", () => {
  const cases = sizes.flatMap((antennas) => [
    { antennas, silent: [] },
    { antennas, silent: [33] },
  ]);
  for (const { antennas, silent } of cases) {
    const name = silent.length === 0 ? `${antennas} antennas` : `${antennas} antennas, one silent`;
    bench(
      `${name}, ${(antennas * (antennas - 1)) / 2} baselines`,
      async () => {
        const before = process.cpuUsage();
        const stages: string[] = [];
        let stage = "";
        const onStage = (name: string) => {
          if (name === stage) return;
          stage = name;
          const seconds = process.cpuUsage(before).user / 1e6;
          stages.push(`${name} from ${seconds.toFixed(1)} s`);
        };
        const dataset = largeArray({ antennas, integrations: 2, channels: 4, silent });
        const check = await checkDataset(dataset, { plan: {}, rules, onStage });
        const [json, page] = [reportJson(check).length, writeHtml(check).length];
        const { user } = process.cpuUsage(before);
        const peak = process.resourceUsage().maxRSS / 1000;
        process.stdout.write(
          `${name}: ${(user / 1e6).toFixed(1)} s of processor, ${peak.toFixed(0)} MB at most, ` +
            `JSON ${(json / 1e6).toFixed(1)} MB, page ${(page / 1e6).toFixed(1)} MB, ${check.flags.length} flags; ${stages.join(", ")}\n`,
        );
      },
      { iterations: 1, warmupIterations: 0, warmupTime: 0, time: 0 },
    );
  }
});
