/**
 * A real observation at 1.1 to 2.1 GHz that Astropy installs among its FITS test data (random_groups.fits, 2012): three
 * baselines of three antennas for one integration, one product, 128 channels of 8 MHz from high to low, no antenna table.
 * Satellite navigation transmits at 1176.45, 1227.60 and 1575.42 MHz (open signal specifications of that service, from
 * memory): the channels that stand out must take in the lower two.
 */
import { spawnSync } from "node:child_process";
import { existsSync } from "node:fs";
import { describe, expect, it } from "vitest";
import { openDataset } from "../../src/dataset/open.ts";
import { checkDataset } from "../../src/report/check.ts";
import { writeText } from "../../src/report/text.ts";
import { loadRules } from "../../src/rules/load.ts";
import { systemTool } from "../support/require.ts";

const python = systemTool("astropy");

/** Where Astropy keeps the file. */
function realFile(): string {
  const script =
    "import astropy.io.fits as f, os; print(os.path.join(os.path.dirname(f.__file__), 'tests', 'data', 'random_groups.fits'))";
  return spawnSync(python!, ["-W", "ignore", "-c", script], { encoding: "utf8" }).stdout.trim();
}

const path = python === undefined ? "" : realFile();

describe.skipIf(!existsSync(path))("a real file with interference", () => {
  it("is judged, and the interference in it is named by channel and frequency", async () => {
    const dataset = await openDataset(path);
    const check = await checkDataset(dataset, { plan: {}, rules: await loadRules() });
    const interference = check.events.filter(({ kind }) => ["burst", "persistent-line"].includes(kind));
    const channels = interference.flatMap(({ scope }) => scope.channels ?? []);
    const named = (frequency: number) => {
      // Channel 0 is at 2097.5 MHz, each next one 8 MHz lower.
      const channel = Math.round((2097.49994068 - frequency) / 7.99999977374);
      return channels.some(([low, high]) => low <= channel && channel <= high);
    };
    expect([1176.45, 1227.6].map(named)).toEqual([true, true]);
    // The upper half of the band is as smooth as the noise.
    expect(channels.every(([low]) => low > 60)).toBe(true);
    const text = writeText(check, { width: 80, colour: false });
    expect(text).toMatch(/Channels \d+ to \d+ \([\d.]+ to [\d.]+\s+MHz\)\s+stand out/);
    expect(text).toContain("no antenna table");
  });
});
