/** Regions of a mask of integrations by channels, and few rectangles that cover them. */
import type { Band } from "../pass/bands.ts";
import type { Rectangle } from "./grid.ts";

/** A connected region: its cells as step * columns + column, ascending. */
export type Region = readonly number[];

/** Gaps that a region bridges, in integrations and in channels. */
const BRIDGE_STEPS = 2;
const BRIDGE_COLUMNS = 2;
/** A rectangle may stand for a region that fills this much of it. */
const LEAST_FILL = 0.9;

/** Connected regions of the cells with mask 1, largest first. */
export function regionsOf(mask: Uint8Array, steps: number, columns: number): Region[] {
  const seen = new Uint8Array(steps * columns);
  const regions: number[][] = [];
  for (let start = 0; start < steps * columns; start++) {
    if (mask[start] !== 1 || seen[start] === 1) continue;
    const region = [start];
    seen[start] = 1;
    for (let k = 0; k < region.length; k++) {
      const step = Math.floor(region[k]! / columns);
      const column = region[k]! % columns;
      for (let s = Math.max(0, step - BRIDGE_STEPS); s <= Math.min(steps - 1, step + BRIDGE_STEPS); s++) {
        const from = Math.max(0, column - BRIDGE_COLUMNS);
        const to = Math.min(columns - 1, column + BRIDGE_COLUMNS);
        for (let c = from; c <= to; c++) {
          const i = s * columns + c;
          if (mask[i] !== 1 || seen[i] === 1) continue;
          seen[i] = 1;
          region.push(i);
        }
      }
    }
    regions.push(region.sort((a, b) => a - b));
  }
  return regions.sort((a, b) => b.length - a.length || a[0]! - b[0]!);
}

export function boundsOf(region: Region, columns: number): Rectangle {
  let low = columns;
  let high = -1;
  for (const cell of region) {
    low = Math.min(low, cell % columns);
    high = Math.max(high, cell % columns);
  }
  return {
    firstStep: Math.floor(region[0]! / columns),
    lastStep: Math.floor(region[region.length - 1]! / columns),
    low,
    high,
  };
}

export function area({ firstStep, lastStep, low, high }: Rectangle): number {
  return (lastStep - firstStep + 1) * (high - low + 1);
}

/** Cover a region: one rectangle where it is about one, else pieces one after the other in time. */
export function coverOf(region: Region, columns: number): Rectangle[] {
  const whole = boundsOf(region, columns);
  if (region.length >= LEAST_FILL * area(whole)) return [whole];
  const pieces: Rectangle[] = [];
  let piece: Rectangle | null = null;
  let filled = 0;
  for (const line of linesOf(region, columns)) {
    if (piece !== null) {
      const joined: Rectangle = {
        firstStep: piece.firstStep,
        lastStep: line.step,
        low: Math.min(piece.low, line.low),
        high: Math.max(piece.high, line.high),
      };
      if (filled + line.cells >= LEAST_FILL * area(joined)) {
        piece = joined;
        filled += line.cells;
        continue;
      }
      pieces.push(piece);
    }
    piece = { firstStep: line.step, lastStep: line.step, low: line.low, high: line.high };
    filled = line.cells;
  }
  if (piece !== null) pieces.push(piece);
  return pieces;
}

/** A region's extent at each of its integrations. */
export function linesOf(
  region: Region,
  columns: number,
): { step: number; low: number; high: number; cells: number }[] {
  const lines: { step: number; low: number; high: number; cells: number }[] = [];
  for (const cell of region) {
    const step = Math.floor(cell / columns);
    const column = cell % columns;
    const line = lines[lines.length - 1];
    if (line?.step === step) {
      line.high = column;
      line.cells += 1;
    } else {
      lines.push({ step, low: column, high: column, cells: 1 });
    }
  }
  return lines;
}

/** A rectangle of a band's own columns, by columns over all sub-bands. */
export function shifted(rectangle: Rectangle, { first }: Band): Rectangle {
  return { ...rectangle, low: rectangle.low + first, high: rectangle.high + first };
}
