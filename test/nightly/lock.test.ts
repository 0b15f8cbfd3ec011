import { mkdir, mkdtemp, readdir, rm, utimes, writeFile } from "node:fs/promises";
import { hostname, tmpdir } from "node:os";
import { join } from "node:path";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { takeLock } from "../../src/nightly/lock.ts";

let folder: string;
let history: string;
beforeEach(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-lock-"));
  history = join(folder, "nights.sqlite");
});
afterEach(() => rm(folder, { recursive: true, force: true }));

const heldBy = (pid: number, host = hostname()) =>
  writeFile(`${history}.running`, JSON.stringify({ pid, host, since: "2026-03-01T00:00:00Z" }));

describe("the lock of a history", () => {
  it("is had by one at a time, and given back", async () => {
    const release = await takeLock(history);
    // The lock of this very process would be its own: another living process stands for the other run.
    await heldBy(process.ppid);
    await expect(takeLock(history)).rejects.toThrow(`another nightly (process ${process.ppid}`);
    await release();
    expect(await readdir(folder)).toEqual([]);
    await (await takeLock(history))();
  });

  it("of a process that is gone is taken over, and of one cut short", async () => {
    await heldBy(2 ** 22 + 1);
    await (await takeLock(history))();
    await writeFile(`${history}.running`, '{"pid":');
    await (await takeLock(history))();
    expect(await readdir(folder)).toEqual([]);
  });

  it("of another machine is respected", async () => {
    await heldBy(1, "elsewhere");
    await expect(takeLock(history)).rejects.toThrow("(process 1 on elsewhere");
  });

  it("goes to one of several that find it abandoned", async () => {
    await heldBy(2 ** 22 + 1);
    const taken = await Promise.allSettled(Array.from({ length: 8 }, () => takeLock(history)));
    expect(taken.filter(({ status }) => status === "fulfilled")).toHaveLength(1);
  });

  it("is not kept for ever by a take-over that died", async () => {
    await heldBy(2 ** 22 + 1);
    const folder = `${history}.running.taking-over`;
    await mkdir(folder);
    await expect(takeLock(history)).rejects.toThrow("has just begun");
    await utimes(folder, new Date(0), new Date(0));
    await (await takeLock(history))();
  });
});
