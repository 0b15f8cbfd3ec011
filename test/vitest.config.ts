import { availableParallelism } from "node:os";
import { fileURLToPath } from "node:url";
import { defineConfig } from "vitest/config";

export default defineConfig({
  root: fileURLToPath(new URL("..", import.meta.url)),
  test: {
    include: ["test/**/*.test.ts"],
    benchmark: { include: ["test/**/*.bench.ts"] },
    globalSetup: ["test/support/build-kernels.ts"],
    setupFiles: ["test/support/setup.ts"],
    reporters: ["default", "./test/support/summary-reporter.ts"],
    // All of the processors: by default one is left idle, which on two is half of them.
    maxWorkers: availableParallelism(),
    testTimeout: 120_000,
    hookTimeout: 120_000,
  },
});
