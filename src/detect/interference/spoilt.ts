/** Channel averages that a burst over the whole band leaves nothing of: no faults of antennas are to be read from them. */
import type { Survey } from "../../measure/survey-result.ts";
import type { SecondPass } from "../pass/second-pass.ts";
import { broadbandBursts } from "./broadband.ts";
import { Grid } from "./grid.ts";

/** (cells x subbands x polarizations) 1 where spoilt; null where nothing is */
export function spoiltAverages(survey: Survey, pass: SecondPass): Uint8Array | null {
  const { subbands, polarizations } = survey.dataset.shape;
  const grid = new Grid(survey, pass);
  let spoilt: Uint8Array | null = null;
  for (const band of pass.bands) {
    for (const { firstStep, lastStep } of broadbandBursts(grid, band)) {
      spoilt ??= new Uint8Array(survey.tracks.cells * subbands * polarizations);
      for (let k = grid.firstOfStep[firstStep]!; k < grid.firstOfStep[lastStep + 1]!; k++) {
        // Bursts are told of single sub-bands only.
        const at = (grid.cells[k]! * subbands + band.subband!) * polarizations;
        spoilt.fill(1, at, at + polarizations);
      }
    }
  }
  return spoilt;
}
