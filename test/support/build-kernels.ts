/** Tests run the sources as they are: the compiled kernels beside them must be those of the sources. */
import { execFileSync } from "node:child_process";
import { fileURLToPath } from "node:url";

export default function buildKernels(): void {
  const script = fileURLToPath(new URL("../../src/util/kernels/build.mjs", import.meta.url));
  execFileSync(process.execPath, [script], { stdio: "inherit" });
}
