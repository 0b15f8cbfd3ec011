/** The other end of `workers.ts`: does one task after the other, and sends back what came of it. */
import { parentPort } from "node:worker_threads";
import { InputError } from "./errors.ts";
import type { Order, Reply, TaskModule } from "./workers.ts";

/** Thrown to end a task that nobody waits for. */
class Stopped extends Error {}

const port = parentPort;
if (port === null) throw new Error("this module runs in a worker thread");

port.on("message", async (order: Order) => {
  try {
    const { run } = (await import(order.module)) as TaskModule<unknown, unknown>;
    const { result, transfer } = await run(order.task, (done) => report(order, done));
    port.postMessage({ kind: "result", result } satisfies Reply, [...(transfer ?? [])]);
  } catch (error) {
    if (!(error instanceof Stopped)) noteFailure(order);
    port.postMessage(replyTo(error));
  }
});

function report({ index, done, failed }: Order, much: number): void {
  done[index] = much;
  if (Atomics.load(failed, 0) < index) throw new Stopped();
}

function noteFailure({ index, failed }: Order): void {
  let lowest = Atomics.load(failed, 0);
  while (index < lowest) {
    const before = Atomics.compareExchange(failed, 0, lowest, index);
    if (before === lowest) return;
    lowest = before;
  }
}

function replyTo(error: unknown): Reply {
  if (error instanceof Stopped) return { kind: "stopped" };
  if (error instanceof InputError) {
    return { kind: "input", message: error.message, place: error.place, advice: error.advice };
  }
  if (error instanceof RangeError) return { kind: "range", message: error.message };
  const { message, stack } = error instanceof Error ? error : new Error(String(error));
  return { kind: "defect", message, stack: stack ?? message };
}
