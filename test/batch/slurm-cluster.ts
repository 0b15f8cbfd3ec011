/**
 * A Slurm of one node on loopback, for one test: daemons, ports, keys and state of its own under a temporary folder, so
 * that neither a Slurm of the machine nor another test meets it.
 */
import { type ChildProcess, spawn, spawnSync } from "node:child_process";
import { randomBytes } from "node:crypto";
import { existsSync } from "node:fs";
import { chmod, mkdir, mkdtemp, readFile, rm, writeFile } from "node:fs/promises";
import { createServer } from "node:net";
import { hostname, tmpdir } from "node:os";
import { join } from "node:path";

const CPUS = 2;

export class SlurmCluster {
  readonly folder: string;
  /** for commands of Slurm and what they start */
  readonly environment: NodeJS.ProcessEnv;
  private readonly daemons: ChildProcess[] = [];

  private constructor(folder: string) {
    this.folder = folder;
    this.environment = { ...process.env, SLURM_CONF: join(folder, "slurm.conf") };
  }

  /** Start it and wait until its node takes jobs. @throws Error with the daemons' words when it does not come up */
  static async start(): Promise<SlurmCluster> {
    const cluster = new SlurmCluster(await mkdtemp(join(tmpdir(), "visvet-slurm-")));
    try {
      await cluster.configure();
      await cluster.startDaemons();
    } catch (error) {
      await cluster.stop();
      throw error;
    }
    return cluster;
  }

  private async configure(): Promise<void> {
    const { folder } = this;
    const [controller, node] = [await freePort(), await freePort()];
    const name = hostname().split(".")[0];
    await chmod(folder, 0o755);
    for (const inner of ["state", "spool"]) await mkdir(join(folder, inner));
    await writeFile(join(folder, "munge.key"), randomBytes(128), { mode: 0o400 });
    const lines = [
      "ClusterName=trial",
      `SlurmctldHost=${name}(127.0.0.1)`,
      `SlurmctldPort=${controller}`,
      `SlurmdPort=${node}`,
      "SlurmUser=root",
      "SlurmdUser=root",
      "AuthType=auth/munge",
      `AuthInfo=socket=${folder}/munge.socket`,
      `StateSaveLocation=${folder}/state`,
      `SlurmdSpoolDir=${folder}/spool`,
      `SlurmctldPidFile=${folder}/slurmctld.pid`,
      `SlurmdPidFile=${folder}/slurmd.pid`,
      "ProctrackType=proctrack/linuxproc",
      "TaskPlugin=task/none",
      "MpiDefault=none",
      "SchedulerType=sched/backfill",
      "SelectType=select/cons_tres",
      "SelectTypeParameters=CR_Core",
      "ReturnToService=2",
      "SchedulerParameters=batch_sched_delay=0,sched_interval=1,bf_interval=1",
      "KillWait=1",
      `NodeName=${name} NodeAddr=127.0.0.1 CPUs=${CPUS} State=UNKNOWN`,
      `PartitionName=main Nodes=${name} Default=YES MaxTime=INFINITE State=UP`,
    ];
    await writeFile(join(folder, "slurm.conf"), `${lines.join("\n")}\n`);
    // From 23.11 on slurmd wants control groups, which a container may not have, unless told otherwise.
    const version = /(\d+)\.(\d+)/.exec(this.run("slurmctld", "-V").out);
    if (version !== null && Number(version[1]) * 100 + Number(version[2]) >= 2311) {
      await writeFile(join(folder, "cgroup.conf"), "CgroupPlugin=disabled\n");
    }
  }

  private async startDaemons(): Promise<void> {
    const { folder } = this;
    const own = (name: string) => join(folder, name);
    this.daemon("munged", [
      "--foreground",
      "--force",
      `--socket=${own("munge.socket")}`,
      `--key-file=${own("munge.key")}`,
      `--pid-file=${own("munged.pid")}`,
      `--log-file=${own("munged.log")}`,
      `--seed-file=${own("munged.seed")}`,
    ]);
    await this.until("munged answers", () => existsSync(own("munge.socket")));
    this.daemon("slurmctld", ["-D", "-c", "-f", own("slurm.conf")]);
    this.daemon("slurmd", ["-D", "-f", own("slurm.conf"), "-N", hostname().split(".")[0]!]);
    await this.until("the node takes jobs", () => this.run("sinfo", "-h", "-o", "%t").out.trim() === "idle");
  }

  private daemon(name: string, args: readonly string[]): void {
    const process = spawn(name, args, { env: this.environment, stdio: ["ignore", "pipe", "pipe"] });
    const log: Buffer[] = [];
    for (const stream of [process.stdout, process.stderr])
      stream.on("data", (bytes: Buffer) => log.push(bytes));
    process.on("error", (error) => log.push(Buffer.from(error.message)));
    this.logs.set(name, log);
    this.daemons.push(process);
  }
  private readonly logs = new Map<string, Buffer[]>();

  /** A command of Slurm, or one that calls them. */
  run(command: string, ...args: readonly string[]): { status: number | null; out: string; err: string } {
    const run = spawnSync(command, args, { env: this.environment, encoding: "utf8", timeout: 30_000 });
    return { status: run.status, out: run.stdout ?? "", err: run.stderr ?? String(run.error) };
  }

  /** Wait for a condition. @throws Error with what the daemons said when it takes too long */
  async until(what: string, holds: () => boolean, seconds = 40): Promise<void> {
    for (let tries = 0; tries < 5 * seconds; tries++) {
      if (holds()) return;
      await new Promise((resolve) => setTimeout(resolve, 200));
    }
    const said = [...this.logs].map(
      ([name, log]) => `${name}: ${Buffer.concat(log).toString().slice(-2000)}`,
    );
    throw new Error(`after ${seconds} s it is not so that ${what}\n${said.join("\n")}`);
  }

  /** State of a job, such as COMPLETED; of an array, of each task. */
  states(job: string): string[] {
    const { out } = this.run("scontrol", "show", "job", job);
    return [...out.matchAll(/JobState=(\w+)/g)].map(([, state]) => state!);
  }

  /** End every daemon by its own process, and take the folder away. */
  async stop(): Promise<void> {
    this.run("scancel", "--user=root", "--full");
    for (const daemon of this.daemons.reverse()) {
      if (daemon.exitCode !== null || daemon.pid === undefined) continue;
      const gone = new Promise((resolve) => daemon.once("exit", resolve));
      daemon.kill("SIGTERM");
      const late = setTimeout(() => daemon.kill("SIGKILL"), 5000);
      await gone;
      clearTimeout(late);
    }
    await rm(this.folder, { recursive: true, force: true, maxRetries: 5 });
  }

  async log(path: string): Promise<string> {
    return readFile(path, "utf8").catch(() => "");
  }
}

function freePort(): Promise<number> {
  return new Promise((resolve, reject) => {
    const server = createServer();
    server.on("error", reject);
    server.listen(0, "127.0.0.1", () => {
      const address = server.address();
      server.close(() => resolve(typeof address === "object" && address !== null ? address.port : 0));
    });
  });
}
