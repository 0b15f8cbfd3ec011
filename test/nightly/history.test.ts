import { spawn, spawnSync } from "node:child_process";
import { mkdir, mkdtemp, readdir, readFile, rm, stat, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { setTimeout as sleep } from "node:timers/promises";
import { fileURLToPath } from "node:url";
import sqlite from "node-sqlite3-wasm";
import { afterEach, beforeEach, describe, expect, it } from "vitest";
import { History } from "../../src/nightly/history/history.ts";
import { MIGRATIONS } from "../../src/nightly/history/migrations.ts";
import {
  allChecks,
  allInterference,
  allSeries,
  deleteChecks,
  saveCheck,
} from "../../src/nightly/history/store.ts";
import { amplitude, nightOf, put, record } from "./synthetic.ts";

let folder: string;
let history: History;
beforeEach(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-history-"));
  history = new History(join(folder, "nights.sqlite"));
});
afterEach(() => rm(folder, { recursive: true, force: true }));

/** The library as it is built, for processes of their own. */
const BUILT = fileURLToPath(new URL("../../dist/nightly/history/", import.meta.url));

describe("a history", () => {
  it("gives back what was put into it", async () => {
    const full = record(3, {
      findings: [
        {
          rule: "silent-antenna",
          family: "amplitude",
          verdict: "hold",
          severity: 0.75,
          title: "An antenna without fringes",
          place: "antenna A04",
          antennas: ["A04"],
          consequence: "None.",
        },
      ],
    });
    const failed = { ...record(1), error: "cut.uvfits: the file ends early" };
    await history.change((connection) => {
      put(connection, full);
      saveCheck(connection, failed, []);
    });
    const [first, second] = await history.read(allChecks);
    expect(first).toMatchObject({ error: failed.error, night: nightOf(1) });
    const { measured: _, interference: __, ...kept } = full;
    expect(second).toMatchObject(kept);
  });

  it("holds one check of the same content by the same plan and rules: the newest", async () => {
    await history.change((connection) => put(connection, record(1), record(1, { score: 12 })));
    const checks = await history.read(allChecks);
    expect(checks).toHaveLength(1);
    expect(checks[0]).toMatchObject({ score: 12 });
  });

  it("gives of each night the median over its datasets, unknown values left out", async () => {
    await history.change((connection) => {
      [0.1, 0.3, 0.7].forEach((value, i) => {
        put(
          connection,
          record(0, { name: `d${i}`, measured: [amplitude("A01", value), amplitude("A02", Number.NaN)] }),
        );
      });
      put(connection, record(1, { measured: [amplitude("A01", 0.2)] }));
    });
    const series = await history.read(allSeries);
    expect(series).toEqual([
      {
        band: record(0).band,
        kind: "antenna",
        item: "A01",
        measure: "amplitude_ratio",
        nights: [nightOf(0), nightOf(1)],
        values: Float64Array.of(0.3, 0.2),
      },
    ]);
  });

  it("loses with a check everything of it", async () => {
    const seen = { low: 1, high: 2, start: 3, end: 4 };
    await history.change((connection) => {
      put(connection, record(0, { measured: [amplitude("A01", 1)], interference: [seen] }));
    });
    const [check] = await history.read(allChecks);
    await history.change((connection) => deleteChecks(connection, [check!.id]));
    expect(await history.read(allSeries)).toEqual([]);
    expect(await history.read(allInterference)).toEqual([]);
  });

  it("that is not there yet is empty, and reading does not make it", async () => {
    expect(await history.read(allChecks)).toEqual([]);
    expect(await readdir(folder)).toEqual([]);
  });

  it("of an older version is brought up to date, with what it holds", async () => {
    const old = new sqlite.Database(history.path);
    old.exec(`${MIGRATIONS[0]}; PRAGMA user_version = 1;
      INSERT INTO dataset_check (content, judged_by, name, path, bytes, night, verdict, score, tool, checked)
      VALUES ('c', 'j', 'old', 'old.uvfits', 1, '2025-12-31', 'ready', 90, '0.0.0', '2026-01-01')`);
    old.close();
    await history.prepare();
    expect(await history.read(allChecks)).toMatchObject([{ name: "old", score: 90 }]);
    expect(await history.read(allInterference)).toEqual([]);
    await history.change((connection) => put(connection, record(1)));
    expect(await history.read(allChecks)).toHaveLength(2);
  });

  it("of a later version, of another kind or damaged is refused and left alone", async () => {
    const later = new sqlite.Database(history.path);
    later.exec("CREATE TABLE t (x); PRAGMA user_version = 99");
    later.close();
    await expect(history.prepare()).rejects.toThrow("this history is of version 99; this visvet knows 2");

    const other = new History(join(folder, "other.sqlite"));
    const foreign = new sqlite.Database(other.path);
    foreign.exec("CREATE TABLE birds (name)");
    foreign.close();
    await expect(other.prepare()).rejects.toThrow("holds something else than a history");

    const text = new History(join(folder, "text.sqlite"));
    await writeFile(text.path, "not a database, but long enough to look like a file of something".repeat(40));
    const before = await readFile(text.path);
    await expect(text.change((connection) => put(connection, record(1)))).rejects.toThrow(
      "no history of visvet",
    );
    expect(await readFile(text.path)).toEqual(before);
  });

  it("is as it was when a change fails half way", async () => {
    await history.change((connection) => put(connection, record(1)));
    const before = await readFile(history.path);
    const failing = history.change((connection) => {
      put(connection, record(2));
      throw new Error("half way");
    });
    await expect(failing).rejects.toThrow("half way");
    expect(await readFile(history.path)).toEqual(before);
    expect(await readdir(folder)).toEqual(["nights.sqlite"]);
  });

  it("keeps its permissions", async () => {
    await history.change((connection) => put(connection, record(1)));
    const { mode } = await stat(history.path);
    await history.change((connection) => put(connection, record(2)));
    expect((await stat(history.path)).mode).toBe(mode);
  });

  it("on a full disk is an error that says so, and stays whole", async () => {
    await history.change((connection) => put(connection, record(1)));
    const before = await readFile(history.path);
    const script = `
      import { History } from "${BUILT}history.js";
      const history = new History(${JSON.stringify(history.path)});
      process.on("SIGXFSZ", () => {});
      try {
        await history.change((connection) => {
          for (let i = 0; i < 5000; i++) connection.run("INSERT INTO seen_file VALUES (?, 1, '', ?)", ["p" + i, "x".repeat(200)]);
        });
        console.log("written");
      } catch (error) { console.log(error.line ?? error.stack); }
    `;
    // A limit on the size of files acts as a disk that is full.
    const run = spawnSync(
      "bash",
      ["-c", `ulimit -f 200; exec "${process.execPath}" --input-type=module -e "$0"`, script],
      { encoding: "utf8" },
    );
    expect(run.stdout).toContain("the history cannot be written");
    expect(run.stdout).toContain("it is as it was before");
    expect(await readFile(history.path)).toEqual(before);
    expect((await readdir(folder)).sort()).toEqual(["nights.sqlite"]);
  });

  it("survives being killed at any moment", async () => {
    const script = `
      import { History } from "${BUILT}history.js";
      const history = new History(${JSON.stringify(history.path)});
      await history.prepare();
      process.stdout.write("ready");
      for (let i = 0; ; i++) {
        await history.change((connection) => {
          for (let k = 0; k < 50; k++) {
            connection.run("INSERT INTO seen_file VALUES (?, 1, '', 'x')", [process.pid + "-" + i + "-" + k]);
          }
        });
        process.stdout.write("done");
      }
    `;
    let rows = 0;
    for (let round = 0; round < 6; round++) {
      const child = spawn(process.execPath, ["--input-type=module", "-e", script]);
      // After so many changes, and a little into the next.
      for (let seen = 0; seen <= round + 1; seen++) {
        await new Promise((resolve) => child.stdout.once("data", resolve));
      }
      await sleep(7 * round);
      child.kill("SIGKILL");
      await new Promise((resolve) => child.on("close", resolve));
      await history.prepare();
      const { count, check } = await history.read((connection) => ({
        count: (connection.get("SELECT count(*) AS n FROM seen_file") as { n: number }).n,
        check: (connection.get("PRAGMA integrity_check") as { integrity_check: string }).integrity_check,
      }));
      expect(check).toBe("ok");
      // Whole changes of 50 rows, and none that was there before is lost.
      expect(count % 50).toBe(0);
      expect(count).toBeGreaterThanOrEqual(rows);
      rows = count;
      expect(await readdir(folder)).toEqual(["nights.sqlite"]);
    }
    expect(rows).toBeGreaterThan(0);
  });

  it("in a folder that is not there is an error with advice", async () => {
    const lost = new History(join(folder, "no", "nights.sqlite"));
    await expect(lost.change((connection) => put(connection, record(1)))).rejects.toThrow();
    await mkdir(join(folder, "no"));
    await lost.change((connection) => put(connection, record(1)));
    expect(await lost.read(allChecks)).toHaveLength(1);
  });
});
