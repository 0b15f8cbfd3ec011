/** Coverage judged between the plan's largest scale and its resolution. */
import type { Annulus, CoverageForm, CoverageTally, RadialGap } from "./coverage-tally.ts";
import { LARGEST_SCALE_FACTOR } from "./derive-plan.ts";
import type { Gridded } from "./grid-dataset.ts";
import type { Coverage } from "./image.ts";
import { type FilledCells, fieldCells } from "./moment-grid.ts";
import type { Plan } from "./plan.ts";
import type { Sampling } from "./sampling.ts";

export interface CoverageResult {
  readonly coverage: Coverage;
  /** largest ratio first */
  readonly radial: readonly RadialGapRow[];
  readonly annuli: readonly Annulus[];
  /** shortest and longest spacing over those that the plan needs */
  readonly shortestRatio: number;
  readonly longestRatio: number;
}

export interface RadialGapRow extends RadialGap {
  readonly kind: "hole" | "short" | "long";
}

/** Spacings that the plan's scales need, wavelengths. */
export function plannedSpacings(plan: Plan): { readonly from: number; readonly to: number } {
  return { from: LARGEST_SCALE_FACTOR / plan.largestScale.value, to: 1 / plan.resolution.value };
}

/** What a tally must hold; a dataset without usable samples gets one that nothing is added to. */
export function coverageFormOf(sampling: Sampling, plan: Plan): CoverageForm {
  const { from, to } = plannedSpacings(plan);
  const known = sampling.longest > 0 && from > 0 && to > 0;
  if (!known) return { shortest: 1, longest: 2, from: 1, to: 1 };
  // Zero spacings of antennas at one place stay below the bins.
  return { shortest: sampling.everShortest * 0.9, longest: sampling.everLongest * 1.1, from, to };
}

/**
 * Share of the flux of a Gaussian of full width `scale` that a spacing of `wavelengths` does not see.
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., section 10.1
 */
export function missedFlux(scale: number, wavelengths: number): number {
  return 1 - Math.exp(-((Math.PI * scale * wavelengths) ** 2) / (4 * Math.LN2));
}

export function judgeCoverage(tally: CoverageTally, cells: FilledCells, plan: Plan): CoverageResult {
  const planned = plannedSpacings(plan);
  const { shortest, longest } = tally.extent();
  // A gap narrower than the fringe of the field is none: the field's edge cannot tell.
  const least = 1 / plan.fieldOfView.value;
  const radial = radialRows(tally.radialGaps(least), planned, shortest, longest, least);
  const annuli = tally.azimuthalGaps(least);
  const hole = radial.find((gap) => gap.kind === "hole");
  const widest = annuli.filter((annulus) => !annulus.empty).sort((a, b) => b.gap - a.gap)[0];
  const gap = widest !== undefined && widest.gap > 0 ? widest : undefined;
  return {
    radial,
    annuli,
    shortestRatio: shortest / planned.from,
    longestRatio: longest / planned.to,
    coverage: {
      filledFraction: filledFraction(cells, planned),
      largestRadialGapWavelengths: hole === undefined ? 0 : hole.to - hole.from,
      radialGapFromWavelengths: hole?.from ?? Number.NaN,
      radialGapToWavelengths: hole?.to ?? Number.NaN,
      largestRadialGapRatioFraction: hole === undefined ? 1 : hole.to / hole.from,
      largestAzimuthalGapRad: gap?.gap ?? 0,
      azimuthalGapAtRad: gap?.at ?? Number.NaN,
      azimuthalGapFromWavelengths: gap?.from ?? Number.NaN,
      azimuthalGapToWavelengths: gap?.to ?? Number.NaN,
      shortestSpacingWavelengths: shortest,
      longestSpacingWavelengths: longest,
      missingFluxFraction: missedFlux(plan.largestScale.value, shortest),
    },
  };
}

/** Holes between the plan's spacings, and what lacks below the shortest and above the longest. */
function radialRows(
  holes: readonly RadialGap[],
  planned: { readonly from: number; readonly to: number },
  shortest: number,
  longest: number,
  least: number,
): RadialGapRow[] {
  const rows: RadialGapRow[] = [];
  for (const hole of holes) {
    const from = Math.max(hole.from, planned.from);
    const to = Math.min(hole.to, planned.to);
    if (to - from > least) rows.push({ from, to, kind: "hole" });
  }
  if (shortest - planned.from > least) rows.push({ from: planned.from, to: shortest, kind: "short" });
  if (planned.to - longest > least) rows.push({ from: longest, to: planned.to, kind: "long" });
  return rows.sort((a, b) => b.to / b.from - a.to / a.from || a.from - b.from);
}

/** Coverage as it was before samples were flagged; the same as now where none is. */
export function unflaggedCoverage(gridded: Gridded, cells: FilledCells, plan: Plan): Coverage {
  const { coverage, flagged } = gridded;
  if (flagged === null) return judgeCoverage(coverage, cells, plan).coverage;
  const tally = coverage.with(flagged.coverage);
  return judgeCoverage(tally, filledByEither(cells, flagged.grid.cells()), plan).coverage;
}

/** The places of cells that either list has, and nothing else of them. */
function filledByEither(a: FilledCells, b: FilledCells): FilledCells {
  const inA = fieldCells(a);
  const only = Array.from({ length: b.count }, (_, i) => i).filter((i) => inA(b.iu[i]!, b.iv[i]!) < 0);
  const join = (first: Int32Array, second: Int32Array) =>
    Int32Array.from([...first.subarray(0, a.count), ...only.map((i) => second[i]!)]);
  return { ...a, count: a.count + only.length, iu: join(a.iu, b.iu), iv: join(a.iv, b.iv) };
}

/** Of the cells of 1/field whose middle is between the planned spacings, those with a sample. */
function filledFraction(cells: FilledCells, planned: { readonly from: number; readonly to: number }): number {
  const { field } = cells.form;
  const inner = (planned.from * field) ** 2;
  const outer = (planned.to * field) ** 2;
  let filled = 0;
  for (let i = 0; i < cells.count; i++) {
    const square = cells.iu[i]! ** 2 + cells.iv[i]! ** 2;
    if (square >= inner && square <= outer) filled += 1;
  }
  const all = cellsBetween(inner, outer);
  return all > 0 ? filled / all : Number.NaN;
}

/** Cells of half a plane with inner <= iu^2 + iv^2 <= outer, in squares of cells. */
function cellsBetween(inner: number, outer: number): number {
  if (!(outer >= 0 && outer < 1e14)) return Number.NaN;
  let count = 0;
  for (let iu = 0; iu * iu <= outer; iu++) {
    const high = Math.floor(Math.sqrt(outer - iu * iu));
    const low = iu * iu >= inner ? 0 : Math.ceil(Math.sqrt(inner - iu * iu));
    if (high < low) continue;
    // Each iv > 0 has its mirror, except on the v axis, where the mirror is the conjugate.
    const both = iu === 0 ? 1 : 2;
    count += both * (high - Math.max(low, 1) + 1) + (low === 0 && iu > 0 ? 1 : 0);
  }
  return count;
}
