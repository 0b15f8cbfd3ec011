import { describe, expect, it } from "vitest";
import { openDataset } from "../../../src/dataset/open.ts";
import { writeUvfits } from "../../../src/simulate/write-uvfits.ts";
import { largeArray } from "../../support/large-array.ts";
import { pieceFolder, renumbered } from "../joined/pieces.ts";
import { readAll } from "../read-all.ts";

const { folder } = pieceFolder();

describe("antenna numbers beyond 255", () => {
  const dataset = renumbered(largeArray({ antennas: 20, integrations: 1, channels: 2 }), (n) => n + 1981);

  // 65536 + 2048 x 2000 + 2001 = 4163537 is whole in float32, which holds whole numbers to 16777216.
  it.each(["2048", "antennas"] as const)("are read as they were written: %s", async (baseline) => {
    const path = `${folder}/${baseline}.uvfits`;
    await writeUvfits(dataset, path, { baseline });
    const read = await openDataset(path);
    const [ours, theirs] = [await readAll(read), await readAll(dataset)];
    expect([ours.antenna1, ours.antenna2]).toEqual([theirs.antenna1, theirs.antenna2]);
    expect(read.summary).toMatchObject({ baselines: 190, subarrays: [1] });
    expect(Math.max(...read.summary.antennas)).toBe(2001);
    expect(read.array.antennas.at(-1)).toMatchObject({ number: 2001, name: "M20" });
  });
});
