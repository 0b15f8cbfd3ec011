import { fileURLToPath } from "node:url";
import { defineConfig } from "vitest/config";

export default defineConfig({
  root: fileURLToPath(new URL("../..", import.meta.url)),
  test: {
    include: ["test/bench/play.ts"],
    reporters: ["default"],
    testTimeout: 3_600_000,
    hookTimeout: 3_600_000,
    disableConsoleIntercept: true,
  },
});
