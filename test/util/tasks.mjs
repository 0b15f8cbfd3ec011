/** Tasks for the tests of worker threads: what each does stands in `task.do`. */
import { InputError } from "../../dist/util/errors.js";

export async function run(task, report) {
  const wait = (milliseconds) => new Promise((resolve) => setTimeout(resolve, milliseconds));
  await wait(task.after ?? 0);
  switch (task.do) {
    case "square": {
      const result = Float64Array.of(task.value ** 2);
      report(1);
      return { result, transfer: [result.buffer] };
    }
    case "input":
      throw new InputError(
        `row ${task.value} is damaged`,
        { file: "a.uvfits", byte: task.value },
        "Copy it again",
      );
    case "range":
      throw new RangeError(`${task.value} is out of range`);
    case "defect":
      throw new TypeError("a mistake of ours");
    case "exit":
      return process.exit(task.value);
    case "throw outside":
      setTimeout(() => {
        throw new Error("out of the blue");
      });
      return wait(10_000);
    case "exhaust": {
      const hoard = [];
      for (;;) hoard.push(new Array(1e6).fill({}));
    }
    case "work on":
      for (let i = 0; ; i++) {
        await wait(1);
        report(i);
      }
    default:
      return { result: () => "functions go to no other thread" };
  }
}
