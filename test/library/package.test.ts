/**
 * The package as npm packs it: what is in it, and that it works where it is installed. It is unpacked into a folder of
 * its own beside links to the packages it depends on, as an installation without a network would have them.
 */
import { spawnSync } from "node:child_process";
import {
  chmodSync,
  cpSync,
  mkdirSync,
  mkdtempSync,
  readFileSync,
  rmSync,
  symlinkSync,
  writeFileSync,
} from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { afterAll, beforeAll, describe, expect, it } from "vitest";
import * as z from "zod";
import { SMALL_NIGHT, SMALL_PLAN } from "../support/small-night.ts";

const ROOT = fileURLToPath(new URL("../..", import.meta.url));
const EXAMPLES = ["check", "stages", "apply", "blocks"] as const;

interface Packed {
  readonly filename: string;
  readonly files: readonly { readonly path: string }[];
}
interface Manifest {
  readonly bin: { readonly visvet: string };
  readonly dependencies: Readonly<Record<string, string>>;
  readonly sideEffects: readonly string[];
}

let folder: string;
let packed: Packed;
const installed = (...names: string[]) => join(folder, "node_modules", "visvet", ...names);
const manifest = () => JSON.parse(readFileSync(installed("package.json"), "utf8")) as Manifest;

function run(command: string, words: readonly string[], cwd = folder) {
  // What a test runner sets must not reach a program that is run as its user would.
  const { NODE_OPTIONS: _, ...env } = process.env;
  const { status, stdout, stderr } = spawnSync(command, words, { cwd, encoding: "utf8", env });
  return { status, out: stdout, err: stderr };
}

beforeAll(() => {
  folder = mkdtempSync(join(tmpdir(), "visvet-package-"));
  // Without scripts: `npm test` has built it just before.
  const pack = run("npm", ["pack", "--ignore-scripts", "--json", "--pack-destination", folder], ROOT);
  packed = (JSON.parse(pack.out) as [Packed])[0];
  const modules = join(folder, "node_modules");
  mkdirSync(join(modules, "@types"), { recursive: true });
  expect(run("tar", ["-xzf", join(folder, packed.filename), "-C", modules]).status).toBe(0);
  run("mv", ["package", "visvet"], modules);
  for (const name of [...Object.keys(manifest().dependencies), "@types/node"]) {
    mkdirSync(join(modules, name, ".."), { recursive: true });
    symlinkSync(join(ROOT, "node_modules", name), join(modules, name));
  }
  mkdirSync(join(modules, ".bin"));
  // As npm does it when it installs.
  chmodSync(installed(manifest().bin.visvet), 0o755);
  symlinkSync(join("..", "visvet", manifest().bin.visvet), join(modules, ".bin", "visvet"));
}, 120_000);
afterAll(() => rmSync(folder, { recursive: true, force: true }));

describe("the package", () => {
  it("ships the program, its types, rules and schemas, and nothing else", () => {
    const paths = packed.files.map(({ path }) => path);
    const expected = [
      /^dist\/.+\.(js|d\.ts)$/,
      /^dist\/.+\.wasm$/,
      /^rules\/[a-z-]+\/[a-z0-9-]+\.yaml$/,
      /^src\/(report|triage)\/schema\/(report|flags|triage)\.schema\.json$/,
      /^(README\.md|package\.json|sample-inputs\/README\.md)$/,
      /^sample-inputs\/batch\/(README\.md|[a-z-]+\.sh)$/,
    ];
    expect(paths.filter((path) => !expected.some((pattern) => pattern.test(path)))).toEqual([]);
    for (const needed of [
      "dist/index.js",
      "dist/index.d.ts",
      "dist/cli/main.js",
      "rules/phase/phase-jump.yaml",
      "src/report/schema/report.schema.json",
      "src/report/schema/flags.schema.json",
      "README.md",
    ]) {
      expect(paths).toContain(needed);
    }
    for (const { path } of packed.files.filter(({ path: name }) => name.endsWith(".js"))) {
      expect(paths, `the types of ${path}`).toContain(path.replace(/\.js$/, ".d.ts"));
    }
  });

  it("says which of its modules do something when they are loaded", () => {
    for (const path of manifest().sideEffects)
      expect(packed.files.map((file) => `./${file.path}`)).toContain(path);
  });

  it("runs as a command", () => {
    const bin = join(folder, "node_modules", ".bin", "visvet");
    const help = run(bin, ["--help"]);
    expect([help.status, help.err]).toEqual([0, ""]);
    expect(help.out).toContain("visvet apply");
    writeFileSync(join(folder, "night.scenario.yaml"), SMALL_NIGHT);
    writeFileSync(join(folder, "plan.yaml"), SMALL_PLAN);
    const made = run(bin, ["simulate", "night.scenario.yaml", "--out", "night.uvfits"]);
    expect([made.status, made.err]).toEqual([0, ""]);
    const words = ["--plan", "plan.yaml", "--out", "r", "--quiet", "--flags-as", "csv", "--tables", "csv"];
    const checked = run(bin, ["check", "night.uvfits", ...words]);
    expect(checked.err).toBe("");
    expect(checked.out).toMatch(/^night: (hold|caution) /);
    const columns = readFileSync(join(folder, "r", "tables", "columns.csv"), "utf8");
    expect(columns).toMatch(/^table,row,column,type,unit/);
  });

  it("publishes the schemas that what it writes keeps to", () => {
    for (const name of ["report", "flags"]) {
      const script = `import s from "visvet/schema/${name}.json" with { type: "json" }; console.log(JSON.stringify(s))`;
      const { out, status } = run(process.execPath, ["--no-warnings", "--input-type=module", "-e", script]);
      expect(status).toBe(0);
      const written: unknown = JSON.parse(readFileSync(join(folder, "r", `${name}.json`), "utf8"));
      expect(z.fromJSONSchema(JSON.parse(out)).safeParse(written).error).toBeUndefined();
    }
  });

  it("lets nothing be imported but what it publishes", () => {
    const script = 'await import("visvet/dist/measure/survey.js")';
    const { err } = run(process.execPath, ["--input-type=module", "-e", script]);
    expect(err).toMatch(/ERR_PACKAGE_PATH_NOT_EXPORTED/);
  });
});

describe("the examples of the library", () => {
  beforeAll(() => {
    cpSync(join(ROOT, "test", "library", "examples"), join(folder, "examples"), { recursive: true });
    writeFileSync(join(folder, "package.json"), JSON.stringify({ type: "module" }));
    writeFileSync(
      join(folder, "tsconfig.json"),
      JSON.stringify({
        compilerOptions: {
          target: "es2022",
          module: "nodenext",
          strict: true,
          noUncheckedIndexedAccess: true,
          noEmitOnError: true,
          // The types of arquero do not pass the strictest check of libraries.
          skipLibCheck: true,
          types: ["node"],
          rootDir: "examples",
          outDir: "built",
        },
        include: ["examples"],
      }),
    );
  });

  it("compile against the types of the package, under the strictest settings", () => {
    const { status, out } = run(join(ROOT, "node_modules", ".bin", "tsc"), ["-p", "."]);
    expect([status, out]).toEqual([0, ""]);
  });

  const said: Readonly<Record<(typeof EXAMPLES)[number], RegExp>> = {
    check: /^night: caution, score \d+\nF1 silent-antenna 25\.0 %\nF2 persistent-line 12\.5 %\n/,
    stages:
      /^least coherent: antenna 3\ncapped first by: \S.*\nrules that took points: .*silent-antenna.*\nflags: F1 F2/,
    // Antenna 3 has 7 of 28 baselines: a quarter of 28 baselines, 30 integrations, 8 channels, 2 products.
    apply: /^3360 samples flagged; left for later: F2\n3360 of 13440 samples of the copy are flagged\n$/,
    // 21 baselines without it, 30 integrations, 8 channels.
    blocks: /^5040 samples of \S+, mean amplitude \d\.\d{3} Jy\n$/,
  };

  it.each(EXAMPLES)("run: %s", (name) => {
    const { status, out, err } = run(process.execPath, [
      join("built", `${name}.js`),
      "night.uvfits",
      "plan.yaml",
      "out",
    ]);
    expect([status, err]).toEqual([0, ""]);
    expect(out).toMatch(said[name]);
  });

  it("say in one line what is wrong with an input", () => {
    const { status, err } = run(process.execPath, [join("built", "check.js"), "nowhere.uvfits"]);
    expect(status).toBe(2);
    expect(err).toMatch(/^nowhere\.uvfits: .*\n$/);
  });
});
