/** Ticks where people expect them on axes of time and of units. */
import { SECONDS_PER_DAY } from "../../util/constants.ts";
import { dateFromMjd, isoFromMjd } from "../../util/dates.ts";

/** Steps of a clock, minutes. */
const CLOCK_STEPS = [
  0.25, 0.5, 1, 2, 5, 10, 15, 20, 30, 60, 120, 180, 240, 360, 720, 1440, 2880, 7200, 14400,
];

export interface TimeAxis {
  /** MJD of 0h of the first day: times are drawn as minutes after it, which keep their digits */
  readonly day: number;
  readonly ticks: readonly number[];
  readonly domain: readonly [number, number];
  readonly label: string;
  readonly format: (minutes: number) => string;
}

/** An axis of UTC over [start, end], MJD, with at most `most` ticks at round times. */
export function timeAxis(start: number, end: number, most = 6): TimeAxis {
  const day = Math.floor(start);
  const from = (start - day) * 1440;
  const to = Math.max((end - day) * 1440, from + 0.1);
  const step = CLOCK_STEPS.find((minutes) => (to - from) / minutes <= most) ?? (to - from) / most;
  const ticks: number[] = [];
  for (let at = Math.ceil(from / step) * step; at <= to; at += step) ticks.push(at);
  const severalDays = to >= 1440;
  const format = (minutes: number) => {
    const iso = isoFromMjd(day + minutes / 1440);
    const clock = step < 1 ? iso.slice(11, 19) : iso.slice(11, 16);
    return severalDays && clock === "00:00" ? iso.slice(5, 10) : clock;
  };
  return { day, ticks, domain: [from, to], label: `UTC from ${dateFromMjd(day)}`, format };
}

export function minutesAfter(axis: TimeAxis, mjd: number): number {
  return ((mjd - axis.day) * SECONDS_PER_DAY) / 60;
}

/** Wavelengths drawn in the multiple that keeps the numbers short. */
export function wavelengthUnit(largest: number): { readonly divisor: number; readonly name: string } {
  if (largest >= 2e6) return { divisor: 1e6, name: "Mλ" };
  if (largest >= 2e3) return { divisor: 1e3, name: "kλ" };
  return { divisor: 1, name: "λ" };
}

/** Arcseconds drawn in the multiple that keeps the numbers short. */
export function angleUnit(arcsec: number): { readonly divisor: number; readonly name: string } {
  if (arcsec >= 7200) return { divisor: 3600, name: "deg" };
  if (arcsec >= 180) return { divisor: 60, name: "arcmin" };
  if (arcsec >= 0.5) return { divisor: 1, name: "arcsec" };
  return { divisor: 1e-3, name: "mas" };
}

/** The largest of 1, 2, 5 times a power of ten that is not above `value`. */
export function roundBelow(value: number): number {
  const power = 10 ** Math.floor(Math.log10(value));
  return power * ([5, 2, 1].find((step) => step * power <= value * (1 + 1e-12)) ?? 1);
}
