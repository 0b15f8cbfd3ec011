/**
 * Flags as the FLAG table of a FITS-IDI file without visibilities: what flags.fits holds, with the tables that its
 * numbers refer to.
 */
import { CannotHoldFlags } from "../dataset/cannot-hold.ts";
import type { Dataset } from "../dataset/dataset.ts";
import { card, headerBlocks } from "../dataset/fits/write.ts";
import {
  antennaTable,
  arrayGeometry,
  frequencyTable,
  namedProducts,
  type Reference,
  sharedCards,
  sourceTable,
} from "../dataset/fits-idi/small-tables.ts";
import { flagTableBytes } from "../dataset/fits-idi/write-flag-rows.ts";
import { flagRowsOf } from "../dataset/fits-tables/flag-rows.ts";
import type { AcceptedFlag } from "./accepted.ts";

/**
 * @param times integration centres of the dataset, MJD (UTC, days), ascending, each once
 * @throws CannotHoldFlags where a FLAG table cannot name what is selected
 */
export function flagFits(dataset: Dataset, flags: readonly AcceptedFlag[], times: Float64Array): Uint8Array {
  const products = namedProducts(dataset.polarizations);
  if (products === undefined) {
    throw new CannotHoldFlags(`products ${dataset.polarizations.join(", ")} are not of one Stokes family`);
  }
  const reference: Reference = { day: Math.floor(times[0] ?? dataset.array.referenceDay ?? 0), products };
  const { rows, timeForm } = flagRowsOf(
    flags.map((flag) => ({ selection: flag, reason: `${flag.id} ${flag.rule}` })),
    {
      shape: dataset.shape,
      polarizations: products,
      antenna: (number) => number,
      field: (id) => id,
      times,
      clock: { referenceDay: reference.day, timeOffset: 0 },
    },
  );
  return Buffer.concat([
    primary(dataset),
    arrayGeometry(dataset, reference),
    antennaTable(dataset, reference),
    frequencyTable(dataset, reference),
    sourceTable(dataset, reference),
    flagTableBytes(rows, timeForm, dataset.shape.subbands, sharedCards(dataset, reference)),
  ]);
}

function primary(dataset: Dataset): Uint8Array {
  return headerBlocks([
    card("SIMPLE", true, "conforms to the FITS standard"),
    card("BITPIX", 8),
    card("NAXIS", 0),
    card("EXTEND", true),
    card("ORIGIN", "visvet"),
    card("DATASET", dataset.name, "what the flags are suggested for"),
  ]);
}
