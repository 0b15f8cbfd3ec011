/**
 * A copy with flags against a bare copy of the same bytes: 32 MB of random groups from the page cache, one sample in ten
 * flagged. The bytes go nowhere, so that the disk is left out; then the whole of `apply` with counting and reading back.
 */
import { mkdtempSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { bench, describe } from "vitest";
import { copyBytes } from "../../src/dataset/fits/copy.ts";
import { openFits } from "../../src/dataset/fits/hdus.ts";
import { openSource } from "../../src/dataset/fits/source.ts";
import { bigEndian, FitsFileWriter, groupItems, groupsHeader } from "../../src/dataset/fits/write.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { copyFlaggingWeights } from "../../src/dataset/random-groups/flag-weights.ts";
import { EVERYTHING } from "../../src/dataset/selection.ts";
import { applyFlags } from "../../src/flags/apply/apply.ts";
import type { ByteSink } from "../../src/util/byte-sink.ts";
import { antennaTable, COMPLEX, DAY, DEC, freq, RA, stokes } from "../dataset/group-file.ts";

const BYTES = 32e6;
const folder = mkdtempSync(join(tmpdir(), "visvet-bench-"));
process.on("exit", () => rmSync(folder, { recursive: true, force: true }));

const axes = [COMPLEX, stokes(4), freq(64), RA, DEC];
const parameters = ["UU", "VV", "WW", "BASELINE", "DATE"].map((name) => ({
  name,
  zero: name === "DATE" ? DAY + 2400000.5 : 0,
}));
const items = groupItems({ axes, parameters });
const groups = Math.floor(BYTES / (4 * items));
const path = join(folder, "night.uvfits");
const writer = await FitsFileWriter.create(path);
await writer.blocks(groupsHeader({ bitpix: -32, axes, parameters, groups }));
const group = Float32Array.from({ length: items }, (_, i) => Math.sin(i) + 1.5);
for (let row = 0; row < groups; row++) {
  group.set([1e-7, -2e-7, 3e-8, 256 * (1 + (row % 2)) + 3, Math.floor(row / 2) / 1e5]);
  await writer.data(bigEndian(group));
}
await writer.blocks(antennaTable());
await writer.commit();

const dataset = await openDataset(path);
/** Six of sixty-four channels, and of the rest what antenna 2 has of one product in a tenth of the time. */
const flags = [
  { ...EVERYTHING, channels: [[10, 15]] as const },
  { ...EVERYTHING, antennas: [2], polarizations: ["RR" as const], time: [DAY, DAY + groups / 2e6] as const },
].map((selection, i) => ({ ...selection, id: `F${i + 1}`, rule: "bench", reason: "" }));

/** Counts what it is given. */
function nowhere(): ByteSink & { bytes: number } {
  return {
    bytes: 0,
    async write(bytes) {
      this.bytes += bytes.length;
    },
    finish: async () => {},
    abandon: async () => {},
  };
}

async function bareCopy(): Promise<void> {
  const cursor = await (await openSource(path)).cursor();
  const sink = nowhere();
  await copyBytes(cursor, sink, 0, Number.POSITIVE_INFINITY);
  await cursor.close();
  if (sink.bytes < 0.99 * BYTES) throw new Error(`${sink.bytes} bytes copied`);
}

async function flaggedCopy(): Promise<void> {
  const file = await openFits(await openSource(path));
  const sink = nowhere();
  await copyFlaggingWeights(file, { dataset, firstRow: 0, rows: dataset.rows, selections: flags }, sink);
  if (sink.bytes < 0.99 * BYTES) throw new Error(`${sink.bytes} bytes copied`);
}

let made = 0;
async function wholeApply(): Promise<void> {
  const out = join(folder, `${made++}.uvfits`);
  const { counts } = await applyFlags({ dataset, flags, out });
  if (counts.union.unflagged < 0.09 * counts.total.unflagged) throw new Error("too few samples are flagged");
  rmSync(out);
}

const options = { time: 600, iterations: 8, warmupIterations: 1, warmupTime: 50 };

describe(`32 MB in groups of ${4 * items} bytes`, () => {
  bench("a bare copy", bareCopy, options);
  bench("a copy with flags", flaggedCopy, options);
  bench("apply: counted, copied, synced, read back", wholeApply, options);
});
