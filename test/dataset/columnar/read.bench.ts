/**
 * Opening tables against what cannot be saved: CSV against the parser alone, which goes over the file twice as the reader
 * does; blocks of the working copy against those of the same data in random groups.
 */
import { mkdtempSync, rmSync } from "node:fs";
import { open } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { parse } from "csv-parse";
import { bench, describe } from "vitest";
import { openColumnar } from "../../../src/dataset/columnar/open.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { writeColumnar } from "../../../src/simulate/write-columnar.ts";

/** Opening takes a while: a few rounds tell the ratio. */
const FEW = { iterations: 3, time: 0, warmupIterations: 1, warmupTime: 0 };

const folder = mkdtempSync(join(tmpdir(), "visvet-bench-"));
process.on("exit", () => rmSync(folder, { recursive: true, force: true }));

const original = await openDataset("sample-inputs/formats.uvfits");
const files = {
  csv: join(folder, "a.csv"),
  parquet: join(folder, "a.parquet"),
  arrow: join(folder, "a.arrow"),
};
for (const path of Object.values(files)) await writeColumnar(original, path, { layout: "sample" });
const opened = await openColumnar([files.csv]);

/** Its date is part of what a working copy is of: with another it is made anew. */
async function touched(path: string): Promise<string[]> {
  const handle = await open(path, "r+");
  touches += 1;
  await handle.utimes(touches, touches);
  await handle.close();
  return [path];
}
let touches = 1;

describe(`opening ${original.rows * 32} samples, one row a sample`, () => {
  bench(
    "CSV, the parser alone, twice",
    async () => {
      for (let pass = 0; pass < 2; pass++) {
        let records = 0;
        const handle = await open(files.csv);
        for await (const _ of handle.createReadStream().pipe(parse({ max_record_size: 1 << 24 })))
          records += 1;
        if (records !== 34_561) throw new Error(`${records} records`);
      }
    },
    FEW,
  );
  for (const [format, path] of Object.entries(files)) {
    bench(
      format,
      async () => {
        const { rows } = await openColumnar(await touched(path));
        if (rows !== original.rows) throw new Error(`${rows} rows`);
      },
      FEW,
    );
  }
});

describe("reading samples of an opened table", () => {
  bench("blocks of the working copy", async () => {
    let rows = 0;
    for await (const block of opened.blocks({ want: "samples" })) rows += block.rows;
    if (rows !== original.rows) throw new Error(`${rows} rows`);
  });
  bench("blocks of the random groups it was made from", async () => {
    let rows = 0;
    for await (const block of original.blocks({ want: "samples" })) rows += block.rows;
    if (rows !== original.rows) throw new Error(`${rows} rows`);
  });
});
