/**
 * Tests that need a system package say so here: on a machine without it they are skipped by name with a visible
 * notice; with VISVET_REQUIRE_ALL=1 a missing one fails.
 */
import { spawnSync } from "node:child_process";
import { existsSync } from "node:fs";

const PYTHONS = [process.env.VISVET_PYTHON, "python3", "/usr/bin/python3"];

function findPython(): string | undefined {
  for (const python of PYTHONS) {
    if (python === undefined) continue;
    const probe = spawnSync(python, ["-c", "import astropy, scipy, numpy"], { stdio: "ignore" });
    if (probe.status === 0) return python;
  }
  return undefined;
}

function onPath(...names: string[]): string | undefined {
  for (const name of names) {
    for (const folder of (process.env.PATH ?? "").split(":")) {
      if (folder !== "" && existsSync(`${folder}/${name}`)) return `${folder}/${name}`;
    }
  }
  return undefined;
}

const FINDERS = {
  /** a Python that has NumPy, SciPy and Astropy */
  astropy: findPython,
  fitsverify: () => onPath("fitsverify"),
  /** a whole Slurm: its controller, its node daemon, its commands and their authentication; root starts them */
  slurm: () => {
    const rest = ["slurmd", "sbatch", "munged"].every((name) => onPath(name) !== undefined);
    return rest && process.getuid?.() === 0 ? onPath("slurmctld") : undefined;
  },
  chromium: () => onPath("chromium", "chromium-browser", "google-chrome"),
};
export type SystemTool = keyof typeof FINDERS;

const found = new Map<SystemTool, string | undefined>();

/** The path of a system tool, or undefined with a notice. Throws where everything is required. */
export function systemTool(tool: SystemTool): string | undefined {
  if (!found.has(tool)) {
    const path = FINDERS[tool]();
    found.set(tool, path);
    if (path === undefined) {
      if (process.env.VISVET_REQUIRE_ALL === "1")
        throw new Error(`${tool} is required here and was not found`);
      process.stdout.write(`notice: ${tool} is not on this machine: its checks are skipped\n`);
    }
  }
  return found.get(tool);
}

/** Run a Python script and parse the JSON it prints. */
export function pythonJson(script: string, args: readonly string[] = []): unknown {
  const python = systemTool("astropy");
  if (python === undefined) throw new Error("no Python: guard the test with systemTool");
  const run = spawnSync(python, ["-W", "ignore", script, ...args], { encoding: "utf8", maxBuffer: 1 << 28 });
  if (run.status !== 0) throw new Error(`${script} failed: ${run.stderr}`);
  return JSON.parse(run.stdout);
}
