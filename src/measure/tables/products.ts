/** Which products carry the total intensity. */
import type { Polarization } from "../../dataset/dataset.ts";

const PARALLEL: ReadonlySet<Polarization> = new Set(["I", "RR", "LL", "XX", "YY"]);

/** Parallel hands and Stokes I; all of them where there is none of these. */
export function parallelProducts(polarizations: readonly Polarization[]): boolean[] {
  const parallel = polarizations.map((name) => PARALLEL.has(name));
  return parallel.includes(true) ? parallel : parallel.map(() => true);
}
