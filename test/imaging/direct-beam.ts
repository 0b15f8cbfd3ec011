/** The dirty beam and the imaging weights the slow way, sample by sample, sharing no code with what is tested. */

export interface Samples {
  /** wavelengths */
  readonly u: readonly number[];
  readonly v: readonly number[];
  readonly weight: readonly number[];
}

/** B(l, m) at imaging weights T. */
export function directBeam(samples: Samples, imaging: readonly number[], l: number, m: number): number {
  let sum = 0;
  let total = 0;
  for (let k = 0; k < samples.u.length; k++) {
    sum += imaging[k]! * Math.cos(2 * Math.PI * (samples.u[k]! * l + samples.v[k]! * m));
    total += imaging[k]!;
  }
  return sum / total;
}

/** Natural, uniform or robust weights of each sample in cells of 1/field, both halves of the plane kept. */
export function directWeights(
  samples: Samples,
  field: number,
  weighting: "natural" | "uniform" | { readonly robust: number },
): number[] {
  if (weighting === "natural") return [...samples.weight];
  const density = new Map<string, number>();
  const cellOf = (u: number, v: number) => `${Math.round(u * field) + 0},${Math.round(v * field) + 0}`;
  samples.u.forEach((u, k) => {
    const v = samples.v[k]!;
    for (const sign of [1, -1]) {
      const cell = cellOf(sign * u, sign * v);
      density.set(cell, (density.get(cell) ?? 0) + samples.weight[k]!);
    }
  });
  const of = (k: number) => density.get(cellOf(samples.u[k]!, samples.v[k]!))!;
  if (weighting === "uniform") return samples.weight.map((weight, k) => weight / of(k));
  const squares = [...density.values()].reduce((sum, value) => sum + value * value, 0);
  const weights = 2 * samples.weight.reduce((sum, value) => sum + value, 0);
  const f2 = (5 * 10 ** -weighting.robust) ** 2 / (squares / weights);
  return samples.weight.map((weight, k) => weight / (1 + of(k) * f2));
}
