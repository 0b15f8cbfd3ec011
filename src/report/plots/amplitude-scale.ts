/** A scale for amplitudes: linear from zero, or logarithmic where they span much. */
import { quantileOf } from "./quantile.ts";

/** Logarithmic where the largest is more than this many times the smallest. */
const LOG_FROM = 30;

export interface AmplitudeScale {
  readonly log: boolean;
  /** where an amplitude stands on the axis */
  readonly place: (amplitude: number) => number;
  readonly options: {
    readonly domain: [number, number];
    readonly ticks: number[] | number;
    readonly tickFormat: (place: number) => string;
    readonly label: string;
    readonly grid: true;
    readonly labelArrow: "none";
  };
}

/**
 * A logarithmic axis is drawn as a linear one of logarithms: a log scale of Plot's labels only the ticks it likes.
 * @param amplitudes above zero; the smallest 0.2 % may fall below the axis
 */
export function amplitudeScale(amplitudes: readonly number[], label: string): AmplitudeScale {
  const sorted = [...amplitudes].sort((a, b) => a - b);
  const largest = sorted.at(-1) ?? 1;
  const smallest = quantileOf(sorted, 0.002, largest);
  const common = { label, grid: true, labelArrow: "none" } as const;
  if (!(largest / smallest > LOG_FROM)) {
    const options = {
      ...common,
      domain: [0, largest * 1.08] as [number, number],
      ticks: 5,
      tickFormat: plainNumber,
    };
    return { log: false, place: (amplitude) => amplitude, options };
  }
  const [low, high] = [smallest * 0.8, largest * 1.25];
  const domain: [number, number] = [Math.log10(low), Math.log10(high)];
  const ticks = decades(low, high).map(Math.log10);
  return {
    log: true,
    place: Math.log10,
    options: { ...common, domain, ticks, tickFormat: (power: number) => plainNumber(10 ** power) },
  };
}

/** 1, 2, 5 of each decade where that is not too many, else the decades. */
function decades(low: number, high: number): number[] {
  const ticks: number[] = [];
  for (let power = Math.floor(Math.log10(low)); power <= Math.log10(high); power++) {
    for (const step of [1, 2, 5]) ticks.push(Number(`${step}e${power}`));
  }
  const inside = ticks.filter((tick) => tick >= low && tick <= high);
  return inside.length <= 8
    ? inside
    : inside.filter((tick) => Number.isInteger(Number(Math.log10(tick).toFixed(9))));
}

/** `0.01`, `1`, `200`, `1e5`. */
function plainNumber(value: number): string {
  if (value === 0) return "0";
  return value >= 1e-3 && value < 1e5
    ? String(Number(value.toPrecision(3)))
    : value.toExponential(0).replace("e+", "e");
}
