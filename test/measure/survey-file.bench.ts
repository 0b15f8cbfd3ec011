/**
 * The surveying pass over a file in the page cache, one thread, against a bare read of the same file in the same way:
 * 27 antennas, by the number of channels. Ratios are of neighbouring runs.
 */
import { closeSync, mkdtempSync, openSync, readSync, rmSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { bench, describe } from "vitest";
import { bigEndian, FitsFileWriter, groupItems, groupsHeader } from "../../src/dataset/fits/write.ts";
import { openDataset } from "../../src/dataset/open.ts";
import { surveyPart } from "../../src/measure/survey.ts";
import { antennaTable, COMPLEX, DAY, DEC, freq, RA, stokes } from "../dataset/group-file.ts";
import { compare } from "../support/compare.ts";

const BYTES = 64e6;
const ANTENNAS = 27;
const BASELINES = (ANTENNAS * (ANTENNAS - 1)) / 2;
const folder = mkdtempSync(join(tmpdir(), "visvet-bench-"));
process.on("exit", () => rmSync(folder, { recursive: true, force: true }));

let state = 20260611;
const random = () => {
  state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
  return (state + 1) / 2 ** 32;
};
const noise = () => 0.13 * Math.sqrt(-2 * Math.log(random())) * Math.cos(2 * Math.PI * random());

/** A source of 1 Jy at the phase centre in the parallel hands, noise in all. */
async function write(channels: number): Promise<string> {
  const axes = [COMPLEX, stokes(4), freq(channels), RA, DEC];
  const parameters = ["UU", "VV", "WW", "BASELINE", "DATE"].map((name) => ({
    name,
    zero: name === "DATE" ? DAY + 2400000.5 : 0,
  }));
  const items = groupItems({ axes, parameters });
  const times = Math.max(1, Math.floor(BYTES / (4 * items) / BASELINES));
  const path = join(folder, `${channels}.uvfits`);
  const writer = await FitsFileWriter.create(path);
  await writer.blocks(groupsHeader({ bitpix: -32, axes, parameters, groups: times * BASELINES }));
  const groups = Float32Array.from({ length: BASELINES * items }, noise);
  for (let i = 0; i < groups.length; i++) {
    const item = (i % items) - parameters.length;
    if (item >= 0 && item % 3 === 2) groups[i] = 1;
    else if (item >= 0 && item % 12 < 6 && item % 3 === 0) groups[i]! += 1;
  }
  for (let time = 0; time < times; time++) {
    for (let a = 1, row = 0; a <= ANTENNAS; a++) {
      for (let b = a + 1; b <= ANTENNAS; b++, row++) {
        groups.set([1e-7 * (b - a), -2e-7, 3e-8, 256 * a + b, (time * 10) / 86_400], row * items);
      }
    }
    await writer.data(bigEndian(groups));
  }
  const numbers = Array.from({ length: ANTENNAS }, (_, i) => i + 1);
  const positions = numbers.map((n): [number, number, number] => [6378000, 30 * n, (7 * n * n) % 400]);
  await writer.blocks(antennaTable({ numbers, positions }));
  await writer.commit();
  return path;
}

function bareRead(path: string): void {
  const file = openSync(path, "r");
  const buffer = new Uint8Array(256 * 1024);
  let bytes = 0;
  for (let got = 1; got > 0; bytes += got) got = readSync(file, buffer, {});
  closeSync(file);
  if (bytes < 0.5 * BYTES) throw new Error(`${bytes} bytes read`);
}

for (const channels of [64, 1024, 4]) {
  const path = await write(channels);
  const dataset = await openDataset(path);
  const survey = async () => {
    const part = await surveyPart(dataset);
    if (part.gathered.order.rows !== dataset.rows) throw new Error("rows were lost");
    part.release();
  };
  const read = async () => {
    let rows = 0;
    for await (const block of dataset.blocks({ want: "samples" })) rows += block.rows;
    if (rows !== dataset.rows) throw new Error("rows were lost");
  };
  const weights = async () => {
    for await (const block of dataset.blocks({ want: "weights" })) if (block.rows === 0) throw new Error();
  };
  const baseline = () => bareRead(path);
  await compare({
    title: `reading samples, ${channels} channels, over a bare read`,
    rounds: 7,
    baseline,
    candidate: read,
  });
  await compare({
    title: `reading weights, ${channels} channels, over a bare read`,
    rounds: 7,
    baseline,
    candidate: weights,
  });
  await compare({
    title: `the survey pass, ${channels} channels, over a bare read`,
    rounds: 7,
    baseline,
    candidate: survey,
  });
  describe(`${BYTES / 1e6} MB, 27 antennas, ${channels} channels, four products`, () => {
    bench("a bare read", baseline, { iterations: 3, time: 100 });
    bench("the survey pass", survey, { iterations: 3, time: 100 });
  });
}
