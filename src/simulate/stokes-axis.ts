/** Polarizations as an axis of Stokes codes. */
import type { Dataset } from "../dataset/dataset.ts";
import { STOKES_CODES } from "../dataset/fits-idi/small-tables.ts";
import { InputError } from "../util/errors.ts";

/**
 * Value of the first code and step to the next.
 *
 * @throws InputError when the codes are not evenly spaced, as an axis of a FITS file has them
 */
export function stokesAxis(dataset: Dataset): { value: number; step: number } {
  const codes = dataset.polarizations.map((name) => STOKES_CODES[name]);
  const step = codes.length > 1 ? codes[1]! - codes[0]! : codes[0]! < 0 ? -1 : 1;
  if (codes.some((code, i) => code !== codes[0]! + i * step)) {
    throw unfit(dataset, `polarizations ${dataset.polarizations.join(", ")}`, "evenly spaced Stokes codes");
  }
  return { value: codes[0]!, step };
}

export function unfit(dataset: Dataset, found: string, expected: string): InputError {
  return new InputError(`${dataset.name} does not fit the file: ${found}, expected ${expected}`);
}
