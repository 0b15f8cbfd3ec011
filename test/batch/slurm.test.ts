import { spawnSync } from "node:child_process";
import { existsSync } from "node:fs";
import { mkdir, mkdtemp, readdir, readFile, rm, writeFile } from "node:fs/promises";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import { writeUvfits } from "../../src/simulate/write-uvfits.ts";
import { systemTool } from "../support/require.ts";
import { withFaults } from "../support/scenarios.ts";
import { SlurmCluster } from "./slurm-cluster.ts";

const MAIN = fileURLToPath(new URL("../../dist/cli/main.js", import.meta.url));
const SCRIPT = fileURLToPath(new URL("../../sample-inputs/batch/check-in-parts.sh", import.meta.url));
const REPORTS = ["flags.json", "report.html", "report.json", "report.txt"];

describe.skipIf(systemTool("slurm") === undefined)("on a Slurm cluster", () => {
  let cluster: SlurmCluster;
  let folder: string;
  beforeAll(async () => {
    folder = await mkdtemp(join(tmpdir(), "visvet-batch-"));
    const { dataset } = withFaults([{ kind: "silent-antenna", antenna: 3 }], {
      name: "night",
      time: { duration: "4min" },
      array: { layout: { kind: "spiral", antennas: 7, inner: "40m", radius: "500m" } },
      frequency: { channels: 8 },
    });
    await writeUvfits(dataset, join(folder, "night.uvfits"));
    await writeFile(join(folder, "visvet"), `#!/bin/bash\nexec ${process.execPath} ${MAIN} "$@"\n`, {
      mode: 0o755,
    });
    // The first time that part 1 is made, it stands still in the middle of its work, as on a node that hangs.
    const hanging = `#!/bin/bash
if [ "$1" = part ] && [ "$SLURM_ARRAY_TASK_ID" = 1 ] && [ "\${SLURM_RESTART_COUNT:-0}" = 0 ]; then
  ${folder}/visvet "$@" &
  kill -STOP $!
  touch ${folder}/stands
  wait
fi
exec ${folder}/visvet "$@"
`;
    await writeFile(join(folder, "hanging"), hanging, { mode: 0o755 });
    cluster = await SlurmCluster.start();
  }, 90_000);
  afterAll(async () => {
    await cluster?.stop();
    await rm(folder, { recursive: true, force: true });
  }, 60_000);

  function submit(
    program: string,
    dataset: string,
    parts: number,
    out: string,
  ): { parts: string; join: string } {
    const run = spawnSync(SCRIPT, [dataset, String(parts), out], {
      cwd: folder,
      env: { ...cluster.environment, VISVET: join(folder, program) },
      encoding: "utf8",
    });
    expect([run.status, run.stderr]).toEqual([0, ""]);
    const [, array, joined] = /^parts (\d+)\njoin (\d+)\n$/.exec(run.stdout)!;
    return { parts: array!, join: joined! };
  }

  it("gives the reports of one check, though a part hung, was killed and requeued", async () => {
    const jobs = submit("hanging", "night.uvfits", 3, "out");
    await cluster.until("part 1 stands still", () => existsSync(join(folder, "stands")));
    expect(cluster.run("scontrol", "requeue", `${jobs.parts}_1`)).toMatchObject({ status: 0, err: "" });
    // Slurm lets a requeued job wait for minutes unless told otherwise.
    await cluster.until("the requeued part may start", () => {
      cluster.run("scontrol", "update", `JobId=${jobs.parts}_1`, "StartTime=now");
      return cluster.states(`${jobs.parts}_1`)[0] === "RUNNING" || existsSync(join(folder, "out/1.part"));
    });
    await cluster.until("the join has ended", () => cluster.states(jobs.join)[0] === "COMPLETED");
    expect((await readdir(join(folder, "out"))).sort()).toEqual(
      ["0.part", "1.part", "2.part", "join.log", "part-0.log", "part-1.log", "part-2.log", ...REPORTS].sort(),
    );
    const once = spawnSync(join(folder, "visvet"), ["check", "night.uvfits", "--out", "once", "--quiet"], {
      cwd: folder,
      encoding: "utf8",
    });
    // A hold: a result, with which the job of the join has ended well all the same.
    expect(once.status).toBe(1);
    expect(await cluster.log(join(folder, "out/join.log"))).toContain(once.stdout);
    for (const name of REPORTS) {
      const [joined, single] = [join(folder, "out", name), join(folder, "once", name)];
      expect((await readFile(joined)).equals(await readFile(single)), name).toBe(true);
    }
  }, 120_000);

  it("makes no part again that is there, and mends one that is damaged", async () => {
    const damaged = join(folder, "out/2.part");
    const whole = await readFile(damaged);
    await writeFile(damaged, whole.subarray(0, 5000));
    const jobs = submit("visvet", "night.uvfits", 3, "out");
    await cluster.until("the join has ended", () => cluster.states(jobs.join)[0] === "COMPLETED");
    expect(await cluster.log(join(folder, "out/part-0.log"))).toContain("is there already");
    expect((await readFile(damaged)).equals(whole)).toBe(true);
  }, 90_000);

  it("never joins what is not there whole: a part that fails says why, and the join is called off", async () => {
    await mkdir(join(folder, "failing"));
    const jobs = submit("visvet", "nowhere.uvfits", 2, "failing");
    await cluster.until("the join is called off", () => cluster.states(jobs.join)[0] === "CANCELLED");
    expect(cluster.states(jobs.parts)).toEqual(["FAILED", "FAILED"]);
    expect(await cluster.log(join(folder, "failing/part-1.log"))).toContain(
      "nowhere.uvfits: there is no such file",
    );
    expect((await readdir(join(folder, "failing"))).sort()).toEqual(["part-0.log", "part-1.log"]);
  }, 90_000);
});
