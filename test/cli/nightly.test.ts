/** `visvet nightly` as a user has it, and as a scheduler kills it. */
import { spawn, spawnSync } from "node:child_process";
import { mkdir, mkdtemp, readdir, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { setTimeout as sleep } from "node:timers/promises";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";

const MAIN = fileURLToPath(new URL("../../dist/cli/main.js", import.meta.url));

const scenario = (day: number, faults = "") => `name: night
array:
  name: Larkfield Array
  latitude: -31.2deg
  longitude: 116.4deg
  layout: { kind: spiral, antennas: 7, inner: 60m, radius: 300m }
  diameter: 12m
time: { start: 2026-03-0${day}T12:00:00, duration: 3min, integration: 10s }
frequency: { start: 1.4GHz, channels: 4, width: 500kHz }
fields:
  - { name: Heron, ra: 8h30m, dec: -28d30m00s }
sky:
  - { flux: 1Jy }
${faults}`;
const PLANS = "plans:\n  - plan: plan.yaml\n";
const PLAN =
  "field_of_view: 10arcmin\nresolution: 1.8arcmin\nlargest_scale: 4arcmin\ndynamic_range: 100\ncorrects_w: yes\n";

let folder: string;
beforeAll(async () => {
  folder = await mkdtemp(join(tmpdir(), "visvet-nightly-cli-"));
  await mkdir(join(folder, "data"));
  await writeFile(join(folder, "data", "plans.yaml"), PLANS);
  await writeFile(join(folder, "data", "plan.yaml"), PLAN);
  for (let day = 1; day <= 3; day++) {
    const faults = day === 3 ? "faults:\n  - { kind: silent-antenna, antenna: 3 }\n" : "";
    await writeFile(join(folder, "s.yaml"), scenario(day, faults));
    visvet("simulate", "s.yaml", "--out", `data/day${day}.uvfits`);
  }
});
afterAll(() => rm(folder, { recursive: true, force: true }));

function visvet(...words: readonly string[]) {
  const run = spawnSync(process.execPath, [MAIN, ...words], { cwd: folder, encoding: "utf8" });
  return { status: run.status, out: run.stdout, err: run.stderr };
}

const night = (name: string, ...words: readonly string[]) => [
  "nightly",
  "data",
  "--history",
  `${name}.sqlite`,
  "--out",
  name,
  "--rest",
  "0s",
  ...words,
];

describe("visvet nightly", () => {
  it("says what it found, hands the summary to a command, and exits with the worst", async () => {
    const { status, out, err } = visvet(
      ...night("plain", "--strict", "--on-trouble", "cat > told.txt; exit 3"),
    );
    expect(status).toBe(1);
    expect(out).toMatch(/^visvet nightly: 3 datasets judged: 1 (caution|hold), 2 ready\n/);
    expect(out).toContain("2026-03-03  day3");
    expect(out).toContain("Wrote plain/index.html");
    expect(await readFile(join(folder, "told.txt"), "utf8")).toMatch(/^visvet nightly: 3 datasets judged/);
    // A command that fails is told of; the verdicts stand.
    expect(err).toBe("--on-trouble cat > told.txt; exit 3: it ended with 3\n");
  });

  it("has nothing to do the second time, in JSON", () => {
    const { status, out, err } = visvet(...night("plain", "--json"));
    expect([status, err]).toEqual([0, ""]);
    expect(JSON.parse(out)).toMatchObject({ worst: "ready", datasets: [], unchanged: 3 });
  });

  it("loses nothing when it is killed at any moment, and goes on from there", async () => {
    const whole = JSON.parse(await readFile(join(folder, "plain", "summary.json"), "utf8")) as {
      unchanged: number;
    };
    expect(whole.unchanged).toBe(3);
    for (let round = 0; round < 3; round++) {
      const child = spawn(process.execPath, [MAIN, ...night("killed")], { cwd: folder, stdio: "ignore" });
      const ended = new Promise((resolve) => child.on("close", resolve));
      await Promise.race([ended, sleep(700 + 1300 * round)]);
      child.kill("SIGKILL");
      await ended;
    }
    const { status, out } = visvet(...night("killed", "--json"));
    expect(status).not.toBe(2);
    const { datasets, unchanged } = JSON.parse(out) as { datasets: unknown[]; unchanged: number };
    expect(datasets.length + unchanged).toBe(3);
    // Every report is whole, and the same as of a run that was left alone.
    for (const day of await readdir(join(folder, "plain"))) {
      if (!day.startsWith("2026")) continue;
      const [own] = await readdir(join(folder, "plain", day));
      for (const file of ["report.html", "report.json", "flags.json"]) {
        const [left, killed] = await Promise.all(
          ["plain", "killed"].map((name) => readFile(join(folder, name, day, own!, file), "utf8")),
        );
        expect(killed).toBe(left);
      }
    }
    expect((await readdir(folder)).filter((name) => /running|changing|lock/.test(name))).toEqual([]);
  });

  it("refuses options that make no sense, in one line", () => {
    const { status, err } = visvet(...night("plain", "--prune"));
    expect([status, err]).toEqual([
      2,
      "--prune needs to know what to keep. Add --keep, such as --keep 365d\n",
    ]);
    expect(visvet(...night("plain", "--keep", "soon")).err).toMatch(
      /^--keep soon: expected how many checks or how long\./,
    );
    expect(visvet("nightly", "lost", "--history", "h.sqlite", "--out", "o").err).toContain(
      "the folder cannot be read",
    );
  });
});
