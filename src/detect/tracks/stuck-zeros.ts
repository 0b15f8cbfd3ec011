/** Exact zeros in place of measurements: of an antenna, of a baseline, of the whole array for a time. */
import type { Polarization } from "../../dataset/dataset.ts";
import type { DetectedEvent } from "../event.ts";
import type { Grid } from "./grid.ts";
import { clock, makeEvent, spanOf } from "./make-event.ts";

/** (times x baselines): 1 all of a cell's samples that are not flagged are zeros, 0 not, -1 nothing there. */
type Zeros = Int8Array;

export function stuckZeros(grid: Grid): DetectedEvent[] {
  const { polarizations } = grid.survey.dataset;
  const present = presentProducts(grid);
  if (grid.survey.totals.zero === 0 || present.length === 0) return [];
  const all = zerosOf(grid, present);
  const events = eventsOf(grid, all.slice(), null);
  // One polarization at a time for what is not common to all.
  for (const polarization of polarizations) {
    const own = present.filter(({ name }) => name === polarization);
    if (own.length === 0 || own.length === present.length) continue;
    const zeros = zerosOf(grid, own);
    for (let i = 0; i < zeros.length; i++) if (all[i] === 1) zeros[i] = 0;
    events.push(...eventsOf(grid, zeros, [polarization]));
  }
  return events;
}

interface Product {
  readonly at: number;
  readonly name: Polarization;
}

/** Products with a usable sample anywhere: those without are absent from the file, which is no fault. */
function presentProducts({ survey }: Grid): Product[] {
  const { subbands, polarizations } = survey.dataset.shape;
  const products = subbands * polarizations;
  const present: Product[] = [];
  for (let at = 0; at < products; at++) {
    for (let i = at; i < survey.tracks.usable.length; i += products) {
      if (survey.tracks.usable[i]! === 0) continue;
      present.push({ at, name: survey.dataset.polarizations[at % polarizations]! });
      break;
    }
  }
  return present;
}

function zerosOf({ survey, cellOf }: Grid, present: readonly Product[]): Zeros {
  const { subbands, polarizations } = survey.dataset.shape;
  const zeros = new Int8Array(cellOf.length).fill(-1);
  for (let i = 0; i < cellOf.length; i++) {
    if (cellOf[i]! < 0) continue;
    let [zero, usable] = [0, 0];
    for (const { at } of present) {
      zero += survey.tracks.zero[cellOf[i]! * subbands * polarizations + at]!;
      usable += survey.tracks.usable[cellOf[i]! * subbands * polarizations + at]!;
    }
    if (zero + usable > 0) zeros[i] = zero > 0.9 * (zero + usable) ? 1 : 0;
  }
  return zeros;
}

function eventsOf(grid: Grid, zeros: Zeros, polarizations: Polarization[] | null): DetectedEvent[] {
  const every = Array.from({ length: grid.baselines }, (_, b) => b);
  const events: DetectedEvent[] = [];
  const tell = (
    cause: "time" | "antenna" | "baseline",
    who: string,
    which: readonly number[],
    scope: { antennas?: number[]; baselines?: (readonly [number, number])[] },
  ) => {
    for (const [start, end] of runsOf(grid, zeros, which)) {
      const time = spanOf(grid, start, end);
      const when =
        time === null
          ? "all the time"
          : `from ${clock(grid.times[start]!)} to ${clock(grid.times[end - 1]!)} UTC`;
      events.push(
        makeEvent(grid, {
          kind: "stuck-zeros",
          cause,
          scope: { ...scope, polarizations, time },
          size: 1,
          sizeError: Number.NaN,
          unit: "fraction",
          significance: 100,
          confidence: 0.99,
          evidence: `${who} exactly 0${polarizations === null ? "" : ` in ${polarizations.join(" ")}`} ${when}, with weights above zero: no measurements.`,
        }),
      );
      for (let t = start; t < end; t++) for (const b of which) zeros[t * grid.baselines + b] = -1;
    }
  };
  tell("time", "All visibilities are", every, {});
  for (const [a, antenna] of grid.antennas.entries()) {
    const which = grid.touching[a]!;
    if (which.length > 1)
      tell("antenna", `Antenna ${antenna}'s visibilities are`, which, { antennas: [antenna] });
  }
  for (const [b, { antenna1, antenna2 }] of grid.survey.baselines.entries()) {
    tell("baseline", `The visibilities of baseline ${antenna1}-${antenna2} are`, [b], {
      baselines: [[antenna1, antenna2]],
    });
  }
  return events;
}

/** Runs of integrations [start, end) in which all of these baselines that are there are zeros. */
function runsOf(grid: Grid, zeros: Zeros, which: readonly number[]): [number, number][] {
  const runs: [number, number][] = [];
  let open: [number, number] | null = null;
  for (let t = 0; t < grid.times.length; t++) {
    let [yes, no] = [0, 0];
    for (const b of which) {
      const zero = zeros[t * grid.baselines + b]!;
      if (zero === 1) yes += 1;
      else if (zero === 0) no += 1;
    }
    if (yes > 0 && no === 0) {
      if (open === null) {
        open = [t, t + 1];
        runs.push(open);
      } else open[1] = t + 1;
    } else if (no > 0) open = null;
  }
  return runs;
}
