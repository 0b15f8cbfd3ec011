/** Read a file with so many threads, each its own ranges into one buffer that stays hot. Usage: bare-read.mjs FILE THREADS */
import { closeSync, openSync, readSync, statSync } from "node:fs";
import { isMainThread, Worker, workerData } from "node:worker_threads";

const BUFFER = 1 << 20;

if (isMainThread) {
  const [, , file, threads] = process.argv;
  const { size } = statSync(file);
  const share = Math.ceil(size / threads);
  // Seconds of reading alone: starting the threads is not counted.
  const seconds = await Promise.all(
    Array.from(
      { length: Number(threads) },
      (_, i) =>
        new Promise((resolve, reject) => {
          const worker = new Worker(new URL(import.meta.url), {
            workerData: { file, from: i * share, to: Math.min(size, (i + 1) * share) },
          });
          worker.on("message", resolve);
          worker.on("error", reject);
        }),
    ),
  );
  process.stdout.write(`${Math.max(...seconds)}\n`);
} else {
  const { file, from, to } = workerData;
  const { parentPort } = await import("node:worker_threads");
  const handle = openSync(file, "r");
  const buffer = new Uint8Array(BUFFER);
  const read = () => {
    const start = process.hrtime.bigint();
    for (let at = from; at < to; at += BUFFER) readSync(handle, buffer, 0, Math.min(BUFFER, to - at), at);
    return Number(process.hrtime.bigint() - start) / 1e9;
  };
  read();
  const times = [read(), read(), read()].sort((a, b) => a - b);
  closeSync(handle);
  parentPort.postMessage(times[1]);
}
