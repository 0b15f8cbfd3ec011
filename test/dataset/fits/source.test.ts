import { chmodSync, mkdirSync, readFileSync } from "node:fs";
import { dirname, join } from "node:path";
import { constants, gzipSync } from "node:zlib";
import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { ByteSource } from "../../../src/dataset/fits/byte-source.ts";
import { openSource } from "../../../src/dataset/fits/source.ts";
import { fileMaker } from "../group-file.ts";
import { lineOfError } from "../read-all.ts";

const file = fileMaker();
const content = Buffer.from(Uint8Array.from({ length: 700_001 }, (_, i) => (i * 7919) >> 3));

async function bytesAt(source: ByteSource, at: number, count: number): Promise<Buffer> {
  const cursor = await source.cursor(at);
  const into = Buffer.alloc(count);
  const got = await cursor.read(into, at);
  await cursor.close();
  return into.subarray(0, got);
}

describe("openSource", () => {
  it.each([
    ["plain", content],
    ["gzipped", gzipSync(content)],
    // RFC 1952, section 2.2: members follow one another.
    [
      "gzipped in two members",
      Buffer.concat([gzipSync(content.subarray(0, 9)), gzipSync(content.subarray(9))]),
    ],
  ])("reads a %s file at any place, forwards and backwards", async (_, bytes) => {
    const source = await openSource(file(bytes));
    await fc.assert(
      fc.asyncProperty(fc.nat({ max: 720_000 }), fc.nat({ max: 300_000 }), async (at, count) => {
        expect((await bytesAt(source, at, count)).equals(content.subarray(at, at + count))).toBe(true);
      }),
      { numRuns: 20 },
    );
  });

  it("tells gzip by its bytes and not by its name", async () => {
    expect((await openSource(file(gzipSync(content), "plain.uvfits"))).sequential).toBe(true);
    expect((await openSource(file(content, "not.gz"))).sequential).toBe(false);
  });

  it("knows how far a file reaches, packed or not", async () => {
    for (const bytes of [content, gzipSync(content)]) {
      const cursor = await (await openSource(file(bytes))).cursor();
      expect(await cursor.reach(1000)).toBe(1000);
      expect(await cursor.reach(10_000_000)).toBe(content.length);
      await cursor.close();
    }
  });

  it("reads a file of one byte", async () => {
    expect(await bytesAt(await openSource(file(Buffer.from("x"))), 0, 5)).toEqual(Buffer.from("x"));
  });

  it("advises on a missing file, a folder, an empty file", async () => {
    const path = file(Buffer.from("x"));
    expect(await lineOfError(openSource(`${path}.nowhere`))).toBe(
      `${path}.nowhere: there is no such file. Check the spelling and the folder`,
    );
    expect(await lineOfError(openSource(join(path, "inside")))).toContain("there is no such file");
    expect(await lineOfError(openSource(dirname(path)))).toBe(
      `${dirname(path)}: this is a folder: expected a file. Name a file inside it`,
    );
    expect(await lineOfError(openSource(file(Buffer.alloc(0))))).toContain("the file is empty");
    const folder = join(dirname(path), "made.uvfits");
    mkdirSync(folder);
    expect(await lineOfError(openSource(folder))).toContain("this is a folder");
  });

  it.skipIf(process.getuid?.() === 0)("advises on a file that may not be read", async () => {
    const path = file(Buffer.from("x"));
    chmodSync(path, 0);
    expect(await lineOfError(openSource(path))).toContain("you may not read this file");
  });

  it("refuses a device", async () => {
    expect(await lineOfError(openSource("/dev/null"))).toBe("/dev/null: this is not a regular file");
  });
});

describe("a damaged gzip file", () => {
  const packed = gzipSync(content);

  it("is refused where it ends early, saying after how much content", async () => {
    const source = await openSource(file(packed.subarray(0, packed.length - 20), "cut.gz"));
    expect(await lineOfError(bytesAt(source, 0, content.length))).toMatch(
      /cut\.gz: the gzip stream ends early after \d+ bytes of content\. The copy is probably incomplete/,
    );
  });

  it("is refused where its check value or its codes are wrong", async () => {
    const wrong = Buffer.from(packed);
    wrong[wrong.length - 6]! ^= 0xff;
    const source = await openSource(file(wrong));
    expect(await lineOfError(bytesAt(source, 0, content.length + 1))).toContain(
      "the gzip stream is damaged (incorrect data check)",
    );
  });

  it("is refused again when it is read again", async () => {
    const source = await openSource(file(packed.subarray(0, 2000)));
    for (let k = 0; k < 2; k++)
      expect(await lineOfError(bytesAt(source, 0, 700_000))).toContain("ends early");
  });
});

describe("a gzip file that unpacks to far more than memory should hold", () => {
  it("is read in memory that does not grow with the content", async () => {
    const zeros = Buffer.alloc(1 << 24);
    const member = gzipSync(zeros, { level: constants.Z_BEST_COMPRESSION });
    const path = file(Buffer.concat(Array(32).fill(member)));
    expect(readFileSync(path).length).toBeLessThan(1_000_000);
    const cursor = await (await openSource(path)).cursor();
    const held = () => process.memoryUsage().arrayBuffers + process.memoryUsage().heapUsed;
    const before = held();
    let most = 0;
    for (let at = 0; at <= 1 << 29; at += 1 << 25) {
      await cursor.reach(at);
      most = Math.max(most, held() - before);
    }
    expect(await cursor.reach(1e12)).toBe(1 << 29);
    await cursor.close();
    // 512 MB of content. What waits for the collector is chunks; a kept content would be all of it.
    expect(most).toBeLessThan(128 * 1024 * 1024);
  });
});
