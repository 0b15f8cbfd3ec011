import { spawnSync } from "node:child_process";
import { afterEach, describe, expect, it } from "vitest";
import { InputError } from "../../src/util/errors.ts";
import { shareOut, Workers } from "../../src/util/workers.ts";

const TASKS = new URL("./tasks.mjs", import.meta.url).href;
const WORKERS = new URL("../../dist/util/workers.js", import.meta.url).href;

let workers = new Workers(3);
afterEach(async () => {
  await workers.close();
  workers = new Workers(3);
});

describe("workers", () => {
  it("answer in the order of the tasks, whoever is first", async () => {
    const tasks = [3, 2, 1].map((value) => ({ do: "square", value, after: 10 * value }));
    expect(await workers.run<object, Float64Array>(TASKS, tasks)).toEqual(
      [9, 4, 1].map((n) => Float64Array.of(n)),
    );
    // And again, with the threads that are there.
    expect(await workers.run(TASKS, tasks.slice(0, 1))).toEqual([Float64Array.of(9)]);
  });

  it("tell how much they have done between them", async () => {
    const told: number[] = [];
    const tasks = [1, 2, 3].map((value) => ({ do: "square", value }));
    await workers.run(TASKS, tasks, (done) => told.push(done));
    expect(told.at(-1)).toBe(3);
  });

  it("pass on an error for the user as it is", async () => {
    const failure = workers.run(TASKS, [
      { do: "square", value: 1 },
      { do: "input", value: 77 },
    ]);
    const error = await failure.then(
      () => null,
      (thrown: unknown) => thrown,
    );
    expect(error).toBeInstanceOf(InputError);
    expect((error as InputError).line).toBe("a.uvfits, byte 77: row 77 is damaged. Copy it again");
  });

  it("fail with the first failure in the order of the tasks, though another came sooner", async () => {
    const tasks = [
      { do: "square", value: 1 },
      { do: "input", value: 1, after: 150 },
      { do: "input", value: 2 },
    ];
    await expect(workers.run(TASKS, tasks)).rejects.toThrow("row 1 is damaged");
  });

  it("stop the tasks after one that failed", async () => {
    const tasks = [{ do: "range", value: 5, after: 50 }, { do: "work on" }];
    await expect(workers.run(TASKS, tasks)).rejects.toThrow(new RangeError("5 is out of range"));
    // The pool is as good as before.
    expect(await workers.run(TASKS, [{ do: "square", value: 4 }])).toEqual([Float64Array.of(16)]);
  });

  it.each([
    ["throws outside its task", { do: "throw outside" }, /worker thread crashed: out of the blue/],
    ["ends itself", { do: "exit", value: 3 }, /worker thread ended by itself, with status 3/],
    ["makes a mistake", { do: "defect" }, /a mistake of ours/],
    ["answers what can not be sent", { do: "nothing" }, /could not be cloned/],
  ])("name a thread that %s, and do not hang", async (_, task, said) => {
    await expect(workers.run(TASKS, [{ do: "square", value: 1 }, task])).rejects.toThrow(said);
    expect(
      await workers.run(
        TASKS,
        [1, 2].map((value) => ({ do: "square", value })),
      ),
    ).toHaveLength(2);
  });

  it("let the process end when nobody closes them", () => {
    const script = `
      const { Workers } = await import(${JSON.stringify(WORKERS)});
      const done = await new Workers(2).run(${JSON.stringify(TASKS)}, [{ do: "square", value: 5 }]);
      process.stdout.write(String(done[0][0]));`;
    const run = spawnSync(process.execPath, ["--input-type=module", "-e", script], {
      encoding: "utf8",
      timeout: 20_000,
    });
    expect([run.status, run.stdout, run.stderr]).toEqual([0, "25", ""]);
  });

  it("leave nothing behind when the process is interrupted", () => {
    const script = `
      const { Workers } = await import(${JSON.stringify(WORKERS)});
      setTimeout(() => process.kill(process.pid, "SIGINT"), 300);
      await new Workers(2).run(${JSON.stringify(TASKS)}, [{ do: "work on" }, { do: "work on" }]);`;
    const run = spawnSync(process.execPath, ["--input-type=module", "-e", script], {
      encoding: "utf8",
      timeout: 20_000,
    });
    expect([run.signal, run.stdout, run.stderr]).toEqual(["SIGINT", "", ""]);
  });

  it("refuse what makes no sense", async () => {
    expect(() => new Workers(0)).toThrow(RangeError);
    await expect(new Workers(1).run(TASKS, [{}, {}])).rejects.toThrow("2 tasks for 1 threads");
  });
});

describe("shareOut", () => {
  it("gives every row to one range, in order, none empty and none longer by more than one", () => {
    for (const [rows, jobs] of [
      [10, 3],
      [2, 5],
      [0, 4],
      [7, 7],
      [1e12, 8],
    ] as const) {
      const ranges = shareOut(rows, jobs);
      expect(ranges.map(([first]) => first)).toEqual(
        [0, ...ranges.map(([, end]) => end)].slice(0, ranges.length),
      );
      expect(ranges.at(-1)?.[1] ?? 0).toBe(rows);
      const lengths = ranges.map(([first, end]) => end - first);
      expect(Math.max(0, ...lengths) - Math.min(...lengths, Math.max(0, ...lengths))).toBeLessThanOrEqual(1);
      expect(lengths.every((length) => length > 0)).toBe(true);
    }
  });
});
