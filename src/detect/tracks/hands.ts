/** Antennas whose hands are exchanged: what belongs into the parallel hands is in the crossed ones. */
import type { DetectedEvent } from "../event.ts";
import { type Grid, type Plane, planeOf } from "./grid.ts";
import { makeEvent } from "./make-event.ts";

const CROSS: ReadonlySet<string> = new Set(["RL", "LR", "XY", "YX"]);

/** @returns the events, and the antennas (indices) they name */
export function exchangedHands(grid: Grid): { events: DetectedEvent[]; antennas: Set<number> } {
  const { survey } = grid;
  const names = survey.dataset.polarizations;
  const crossed: Plane[] = [];
  for (let subband = 0; subband < survey.dataset.shape.subbands; subband++) {
    for (const [product, name] of names.entries()) {
      if (!CROSS.has(name)) continue;
      const plane = planeOf(survey, null, grid.cellOf.length, grid.cellOf, subband, product);
      if (plane !== null) crossed.push(plane);
    }
  }
  if (crossed.length === 0 || grid.antennas.length < 3) return { events: [], antennas: new Set() };
  const across = powersOf(grid, crossed);
  const along = powersOf(grid, grid.planes);
  // By baseline, whether the crossed hands hold the signal, where that can be told.
  const swapped = across.map(({ power, error }, b) => {
    const difference = power - along[b]!.power;
    const sure = Math.abs(difference) > 6 * Math.hypot(error, along[b]!.error);
    return sure
      ? Math.sign(difference) * Math.min(1, Math.abs(difference) / (power + along[b]!.power) / 0.5)
      : 0;
  });
  const antennas = new Set<number>();
  const events: DetectedEvent[] = [];
  for (const [a, number] of grid.antennas.entries()) {
    const own = grid.touching[a]!.filter((b) => swapped[b] !== 0);
    const yes = own.filter((b) => swapped[b]! > 0.5);
    if (own.length < 2 || yes.length < 0.75 * own.length) continue;
    const others = swapped.filter((s, b) => s !== 0 && !grid.touching[a]!.includes(b));
    if (others.length > 0 && others.filter((s) => s > 0).length > others.length / 2) continue;
    antennas.add(a);
    const share =
      yes.reduce((sum, b) => sum + across[b]!.power, 0) /
      yes.reduce((sum, b) => sum + across[b]!.power + Math.max(0, along[b]!.power), 0);
    const errors = Math.hypot(...yes.map((b) => Math.hypot(across[b]!.error, along[b]!.error)));
    const significance = yes.reduce((sum, b) => sum + across[b]!.power - along[b]!.power, 0) / errors;
    events.push(
      makeEvent(grid, {
        kind: "exchanged-hands",
        cause: "antenna",
        scope: { antennas: [number] },
        size: share,
        sizeError: Number.NaN,
        unit: "fraction",
        significance,
        evidence: `On ${yes.length} of ${own.length} baselines of antenna ${number} the crossed hands hold ${(100 * share).toFixed(0)} % of the power; elsewhere the parallel hands hold it.`,
        repair: `exchange the two hands of antenna ${number}`,
      }),
    );
  }
  return { events, antennas };
}

interface Power {
  readonly power: number;
  readonly error: number;
}

/** Mean power by baseline, noise taken off. */
function powersOf(grid: Grid, planes: readonly Plane[]): Power[] {
  return Array.from({ length: grid.baselines }, (_, b) => {
    let [power, variance, n] = [0, 0, 0];
    for (const plane of planes) {
      for (let t = 0; t < grid.times.length; t++) {
        const i = t * grid.baselines + b;
        if (Number.isNaN(plane.real[i]!)) continue;
        power += plane.real[i]! ** 2 + plane.imag[i]! ** 2 - 2 * plane.variance[i]!;
        variance += (2 * plane.variance[i]!) ** 2;
        n += 1;
      }
    }
    return { power: n === 0 ? 0 : power / n, error: n === 0 ? 0 : Math.sqrt(variance) / n };
  });
}

export function takeOutAntennas(grid: Grid, antennas: ReadonlySet<number>): void {
  for (const plane of grid.planes) {
    for (let i = 0; i < plane.real.length; i++) {
      const b = i % grid.baselines;
      if (!antennas.has(grid.first[b]!) && !antennas.has(grid.second[b]!)) continue;
      plane.real[i] = Number.NaN;
      plane.imag[i] = Number.NaN;
      plane.variance[i] = Number.NaN;
    }
  }
}
