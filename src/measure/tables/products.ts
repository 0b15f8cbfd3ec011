/** Which products carry the total intensity. */
import type { Polarization } from "../../dataset/dataset.ts";

const PARALLEL: ReadonlySet<Polarization> = new Set(["I", "RR", "LL", "XX", "YY"]);

/** Parallel hands and Stokes I; all of them where there is none of these. */
export function parallelProducts(polarizations: readonly Polarization[]): boolean[] {
  const parallel = polarizations.map((name) => PARALLEL.has(name));
  return parallel.includes(true) ? parallel : parallel.map(() => true);
}

/** The same as numbers (subband x polarizations + polarization) of the products of a row. */
export function parallelNumbers(subbands: number, polarizations: readonly Polarization[]): number[] {
  const parallel = parallelProducts(polarizations);
  return Array.from({ length: subbands * parallel.length }, (_, product) => product).filter(
    (product) => parallel[product % parallel.length],
  );
}
