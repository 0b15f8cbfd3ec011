/**
 * The whole program against a bare read of the same file, a NumPy script and DuckDB, and how its time and memory grow.
 * Makes its data in the system's temporary folder. VISVET_BENCH_LARGEST (MB, default 4000) is the size of the largest file.
 */
import { spawnSync } from "node:child_process";
import { availableParallelism } from "node:os";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { it } from "vitest";
import { folder, forget, observation, type Wanted } from "./data.ts";
import { median, pairs, type Run, timed, visvet } from "./measure.ts";

const LARGEST = Number(process.env.VISVET_BENCH_LARGEST ?? 4000);
const THREADS = Math.min(2, availableParallelism());
const USUAL: Wanted = { antennas: 27, channels: 64, megabytes: LARGEST / 4, faults: true };
const here = (name: string) => fileURLToPath(new URL(name, import.meta.url));
const say = (line: string) => process.stdout.write(`${line}\n`);
const times = (value: number) => value.toPrecision(3);

/** Seconds of a bare read, the file in the page cache. */
function bareRead(path: string): Run {
  const run = spawnSync(process.execPath, [here("bare-read.mjs"), path, String(THREADS)], {
    encoding: "utf8",
  });
  if (run.status !== 0) throw new Error(run.stderr);
  return { seconds: Number(run.stdout), peak: Number.NaN };
}

const check = (path: string) => () =>
  visvet("check", path, "--quiet", "--jobs", String(THREADS), "--out", join(folder, "out"));
const part = (path: string) => () =>
  visvet(
    "part",
    path,
    "--index",
    "0",
    "--of",
    "1",
    "--jobs",
    String(THREADS),
    "--out",
    join(folder, `part-${Date.now()}`),
  );

function againstBareRead(wanted: Wanted): void {
  const { path, bytes } = observation(wanted);
  // The fixed rest, measured on a file so small that its samples take no time.
  const small = observation({ ...wanted, megabytes: 1 });
  const kind = wanted.faults ? "with faults" : "clean";
  const rest = median(Array.from({ length: 5 }, () => check(small.path)().seconds));
  const whole = pairs(5, check(path), () => bareRead(path));
  const survey = pairs(5, part(path), () => bareRead(path));
  const start = median(
    Array.from(
      { length: 5 },
      () =>
        visvet(
          "part",
          small.path,
          "--index",
          "0",
          "--of",
          "1",
          "--out",
          join(folder, `p-${Date.now()}-${Math.random()}`),
        ).seconds,
    ),
  );
  const read = median(whole.other.map(({ seconds }) => seconds));
  const less = (runs: readonly Run[], fixed: number) =>
    times((median(runs.map(({ seconds }) => seconds)) - fixed) / read);
  say(
    `| survey pass, ${kind}, ${Math.round(bytes / 1e6)} MB, start taken off | ${less(survey.one, start)} of a bare read |`,
  );
  say(`| all passes, ${kind}, the fixed rest taken off | ${less(whole.one, rest)} of a bare read |`);
  say(`| the fixed rest: start, beam, text, page | ${times(rest)} s on this machine |`);
  forget(path);
  forget(small.path);
}

it("plays", () => {
  say(`\n| what | seen, ${THREADS} threads |\n| --- | --- |`);
  const help = pairs(
    9,
    () => visvet("--help"),
    () => timed(process.execPath, ["-e", "0"]),
  );
  say(`| visvet --help against node -e 0 | ${times(help.ratio)} times |`);
  againstBareRead({ ...USUAL, faults: false });
  againstBareRead(USUAL);

  const large = observation({ ...USUAL, megabytes: LARGEST });
  const numpy = pairs(
    2,
    () => timed("/usr/bin/python3", [here("survey.py"), large.path, "0.02"]),
    check(large.path),
  );
  say(
    `| the NumPy script against check, ${LARGEST} MB | ${times(numpy.ratio)} times as long (${times(numpy.low)} to ${times(numpy.high)}) |`,
  );

  const quarter = observation({ ...USUAL, megabytes: LARGEST / 16 });
  const middle = observation(USUAL);
  const growth = pairs(3, check(large.path), check(middle.path));
  const lower = pairs(3, check(middle.path), check(quarter.path));
  say(`| time, ${LARGEST} MB against ${LARGEST / 4} MB | ${times(growth.ratio)} times |`);
  say(`| time, ${LARGEST / 4} MB against ${LARGEST / 16} MB | ${times(lower.ratio)} times |`);
  const peak = (runs: readonly Run[]) => median(runs.map(({ peak: bytes }) => bytes));
  say(`| largest resident size, ${LARGEST} MB | ${Math.round(peak(growth.one) / 1e6)} MB |`);
  say(`| largest resident size, ${LARGEST / 4} MB | ${Math.round(peak(growth.other) / 1e6)} MB |`);
  say(`| largest resident size, ${LARGEST / 16} MB | ${Math.round(peak(lower.other) / 1e6)} MB |`);
  forget(large.path);
  forget(middle.path);

  const table = join(folder, "samples.parquet");
  timed(process.execPath, [here("duckdb.mjs"), "make", quarter.path, table]);
  const duckdb = pairs(
    3,
    () => timed(process.execPath, [here("duckdb.mjs"), "ask", table, String(THREADS)]),
    check(quarter.path),
  );
  say(
    `| DuckDB's aggregates over Parquet against check, ${LARGEST / 16} MB of random groups | ${times(duckdb.ratio)} times as long (${times(duckdb.low)} to ${times(duckdb.high)}) |`,
  );
  forget(quarter.path);
  forget(table);

  const base = { antennas: 27, channels: 64 };
  const shapes = [
    ...[8, 64, 128].map((antennas) => ({ ...base, antennas })),
    ...[16, 1024, 4096].map((channels) => ({ ...base, channels })),
  ];
  const size = LARGEST / 16;
  const standard = observation({ ...USUAL, ...base, megabytes: size });
  for (const shape of shapes) {
    const other = observation({ ...USUAL, ...shape, megabytes: size });
    const { ratio, one } = pairs(3, check(other.path), check(standard.path));
    say(
      `| ${shape.antennas} antennas, ${shape.channels} channels against 27 and 64, ${size} MB each | ${times(ratio)} times; ${Math.round(peak(one) / 1e6)} MB resident |`,
    );
    forget(other.path);
  }
});
