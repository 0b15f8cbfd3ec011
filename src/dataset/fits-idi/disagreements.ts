/** Keywords that every table carries a copy of: where they differ from the axes of UV_DATA, the axes count. */
import type { Hdu } from "../fits/hdus.ts";
import type { Notes } from "../notes.ts";
import type { UvLayout } from "./uv-layout.ts";

/** Of a frequency: two writers' roundings. */
const SAME_FREQUENCY = 1e-9;
/** Of a width: single precision. */
const SAME_WIDTH = 1e-6;

/** @param hdus the tables, UV_DATA among them */
export function noteDisagreements(hdus: readonly Hdu[], layout: UvLayout, notes: Notes): void {
  const { stokes, subband, frequency } = layout;
  const reference = frequency.value;
  const expected: readonly (readonly [keyword: string, value: number, tolerance: number])[] = [
    ["NO_STKD", stokes.length, 0],
    ["NO_BAND", subband.length, 0],
    ["NO_CHAN", frequency.length, 0],
    ["STK_1", stokes.value + (1 - stokes.pixel) * stokes.step, 0],
    ["REF_FREQ", reference, SAME_FREQUENCY * Math.abs(reference)],
    ["CHAN_BW", frequency.step, SAME_WIDTH * Math.abs(frequency.step)],
    ["REF_PIXL", frequency.pixel, SAME_WIDTH * Math.abs(frequency.pixel)],
  ];
  for (const { header } of hdus) {
    const odd = expected.flatMap(([keyword, value, tolerance]) => {
      const written = header.looseNumber(keyword);
      // An axis that is not there (NaN), and a copy that was never filled in, say nothing.
      if (written === undefined || written === 0 || !(Math.abs(written - value) > tolerance)) return [];
      return [`${keyword} ${written} (${value})`];
    });
    if (odd.length === 0) continue;
    const text = `${header.place.part} says otherwise than the axes of UV_DATA, which count (in brackets): ${odd.join(", ")}`;
    notes.fault("keywords-disagree", text);
  }
}
