/**
 * Work shared out among threads. A task module exports `run`; each task of a call goes to one thread, and the answers
 * come back in the order of the tasks, so that what is made of them does not depend on who was first.
 *
 * The first failure, in the order of the tasks, is the failure of the call: the same as if one thread had done them one
 * after the other.
 */
import { Worker } from "node:worker_threads";
import { InputError, type Place } from "./errors.ts";

/** What a task module exports. Everything goes through structured cloning. */
export interface TaskModule<Task, Result> {
  run(task: Task, report: Report): Promise<Answer<Result>>;
}

/**
 * Tell how much is done, in whatever unit the tasks share, since the task began. Call it once a block: where another
 * task has failed, it ends this one by throwing.
 */
export type Report = (done: number) => void;

export interface Answer<Result> {
  readonly result: Result;
  /** buffers of the result that are given away and not copied */
  readonly transfer?: readonly ArrayBuffer[];
}

/** What a thread is sent. */
export interface Order {
  readonly module: string;
  readonly task: unknown;
  /** place among the tasks of its call */
  readonly index: number;
  /** (tasks) how much each has done */
  readonly done: Float64Array;
  /** the lowest index of a task that failed */
  readonly failed: Int32Array;
}

/** What a thread sends back. */
export type Reply =
  | { readonly kind: "result"; readonly result: unknown }
  | {
      readonly kind: "input";
      readonly message: string;
      readonly place: Place;
      readonly advice: string | undefined;
    }
  | { readonly kind: "range"; readonly message: string }
  | { readonly kind: "defect"; readonly message: string; readonly stack: string }
  | { readonly kind: "stopped" };

/** How often progress is looked at, milliseconds. */
const EVERY = 100;
const NONE_FAILED = 2 ** 31 - 1;

export class Workers {
  /** threads at most */
  readonly jobs: number;
  private readonly threads: (Thread | undefined)[] = [];
  private closed = false;

  constructor(jobs: number) {
    if (!(Number.isInteger(jobs) && jobs > 0))
      throw new RangeError(`${jobs} jobs: expected a whole number above 0`);
    this.jobs = jobs;
  }

  /**
   * @param module     URL of the task module, from `moduleBeside`
   * @param tasks      at most `jobs`: one a thread
   * @param onProgress told the sum of what the tasks have reported
   * @throws what the first failing task threw: InputError and RangeError as themselves
   */
  async run<Task, Result>(
    module: string,
    tasks: readonly Task[],
    onProgress?: (done: number) => void,
  ): Promise<Result[]> {
    if (this.closed) throw new Error("these workers were closed");
    if (tasks.length > this.jobs) throw new RangeError(`${tasks.length} tasks for ${this.jobs} threads`);
    const done = new Float64Array(new SharedArrayBuffer(8 * tasks.length));
    const failed = new Int32Array(new SharedArrayBuffer(4)).fill(NONE_FAILED);
    const running = tasks.map((task, index) =>
      this.thread(index).send({ module, task, index, done, failed }),
    );
    const tell = () => onProgress?.(done.reduce((sum, part) => sum + part, 0));
    const timer = onProgress === undefined ? undefined : setInterval(tell, EVERY);
    try {
      const settled = await Promise.allSettled(running);
      const results = settled.map((outcome, index) => resultOf(outcome, index, failed));
      tell();
      return results as Result[];
    } finally {
      clearInterval(timer);
    }
  }

  /** End the threads. Safe to call twice. */
  async close(): Promise<void> {
    this.closed = true;
    await Promise.all(this.threads.map((thread) => thread?.end()));
  }

  private thread(index: number): Thread {
    let thread = this.threads[index];
    if (thread === undefined || thread.ended) {
      thread = new Thread();
      this.threads[index] = thread;
    }
    return thread;
  }
}

/** @throws the failure that counts: that of the first task that failed by itself */
function resultOf(outcome: PromiseSettledResult<Reply>, index: number, failed: Int32Array): unknown {
  if (outcome.status === "rejected") throw outcome.reason;
  const reply = outcome.value;
  if (reply.kind === "result") return reply.result;
  if (reply.kind === "input") throw new InputError(reply.message, reply.place, reply.advice);
  if (reply.kind === "range") throw new RangeError(reply.message);
  // Those that were stopped come after the one that failed, which has thrown above.
  if (reply.kind === "stopped") throw new Error(`task ${index} was stopped for task ${failed[0]}`);
  const defect = new Error(reply.message);
  defect.stack = reply.stack;
  throw defect;
}

/** One thread, which does one task at a time. It keeps no process alive while it has nothing to do. */
class Thread {
  ended = false;
  private readonly worker: Worker;
  private pending:
    | { resolve: (reply: Reply) => void; reject: (error: Error) => void; order: Order }
    | undefined;

  constructor() {
    this.worker = new Worker(new URL(moduleBeside("./worker-thread", import.meta.url)), {
      // Options of the process, such as how its first module is read, are not for threads.
      execArgv: [],
    });
    this.worker.unref();
    this.worker.on("message", (reply: Reply) => this.settle((pending) => pending.resolve(reply)));
    this.worker.on("error", (error: NodeJS.ErrnoException) => this.fail(crashOf(error)));
    this.worker.on("exit", (code) =>
      this.fail(new Error(`a worker thread ended by itself, with status ${code}`)),
    );
  }

  send(order: Order): Promise<Reply> {
    return new Promise((resolve, reject) => {
      this.pending = { resolve, reject, order };
      this.worker.ref();
      try {
        this.worker.postMessage(order);
      } catch (error) {
        this.settle((pending) => pending.reject(error as Error));
      }
    });
  }

  async end(): Promise<void> {
    this.ended = true;
    await this.worker.terminate();
  }

  private settle(how: (pending: NonNullable<Thread["pending"]>) => void): void {
    const { pending } = this;
    this.pending = undefined;
    this.worker.unref();
    if (pending !== undefined) how(pending);
  }

  private fail(error: Error): void {
    this.ended = true;
    this.settle((pending) => {
      // Whoever comes after it may stop.
      Atomics.store(
        pending.order.failed,
        0,
        Math.min(pending.order.index, Atomics.load(pending.order.failed, 0)),
      );
      pending.reject(error);
    });
  }
}

function crashOf(error: NodeJS.ErrnoException): Error {
  if (error.code === "ERR_WORKER_OUT_OF_MEMORY") {
    return new InputError("a worker thread ran out of memory", {}, "Take fewer --jobs, or less --memory", {
      cause: error,
    });
  }
  return new Error(`a worker thread crashed: ${error.message}`, { cause: error });
}

/**
 * The URL of a module by its name without an ending, such as `./survey-task`, beside another. Threads run what was
 * built: where the sources are run themselves, as tests do, it is the twin in dist.
 *
 * @param from import.meta.url of the module that asks
 */
export function moduleBeside(name: string, from: string): string {
  const built = from.endsWith(".ts") ? from.replace(/\/src\/(?!.*\/src\/)/, "/dist/") : from;
  return new URL(`${name}.js`, built).href;
}

/** Cut `rows` into at most `jobs` ranges [first, end) of nearly equal length, none of them empty. */
export function shareOut(rows: number, jobs: number): [number, number][] {
  const ranges: [number, number][] = [];
  for (let job = 0; job < jobs; job++) {
    const [first, end] = [Math.floor((rows * job) / jobs), Math.floor((rows * (job + 1)) / jobs)];
    if (end > first) ranges.push([first, end]);
  }
  return ranges;
}
