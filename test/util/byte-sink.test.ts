import { mkdtempSync, readFileSync, rmSync, writeFileSync } from "node:fs";
import { open } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { gunzipSync } from "node:zlib";
import { afterAll, describe, expect, it } from "vitest";
import { openSink } from "../../src/util/byte-sink.ts";

const folder = mkdtempSync(join(tmpdir(), "visvet-sink-"));
afterAll(() => rmSync(folder, { recursive: true }));

describe("a sink of bytes", () => {
  it.each([
    ["plain", false],
    ["packed", true],
  ])("takes bytes that are changed afterwards: %s", async (name, gzip) => {
    const path = join(folder, name);
    const sink = await openSink(path, gzip, open);
    const buffer = new Uint8Array(70_000);
    for (let k = 1; k <= 5; k++) {
      buffer.fill(k);
      await sink.write(buffer);
    }
    buffer.fill(99);
    await sink.finish();
    const written = readFileSync(path);
    const content = gzip ? gunzipSync(written) : written;
    const expected = Buffer.concat([1, 2, 3, 4, 5].map((k) => Buffer.alloc(70_000, k)));
    expect(content.equals(expected)).toBe(true);
  });

  it("packs to the same bytes each time", async () => {
    const bytes = await Promise.all(
      ["one.gz", "two.gz"].map(async (name) => {
        const sink = await openSink(join(folder, name), true, open);
        await sink.write(Buffer.from("the same content"));
        await sink.finish();
        return readFileSync(join(folder, name));
      }),
    );
    expect(bytes[0]!.equals(bytes[1]!)).toBe(true);
  });

  it("never writes into a file that is there", async () => {
    const path = join(folder, "there");
    writeFileSync(path, "mine");
    await expect(openSink(path, false, open)).rejects.toThrow("EEXIST");
    expect(readFileSync(path, "utf8")).toBe("mine");
  });
});
