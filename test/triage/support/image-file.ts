/** Images as FITS files. */
import { writeFileSync } from "node:fs";
import type { Field } from "../../../src/dataset/dataset.ts";
import { bigEndian, card, dataPadding, headerBlocks, real } from "../../../src/dataset/fits/write.ts";
import type { Grid } from "./direct-image.ts";

/** A 32-bit floating point image in the SIN projection, the phase centre at pixel size / 2 + 1. */
export function imageBytes(
  pixels: Float64Array,
  { size, cell }: Grid,
  field: Field,
  beam?: number,
): Uint8Array {
  const degrees = (radians: number) => real((radians * 180) / Math.PI);
  const header = headerBlocks([
    card("SIMPLE", true),
    card("BITPIX", -32),
    card("NAXIS", 4),
    card("NAXIS1", size),
    card("NAXIS2", size),
    card("NAXIS3", 1),
    card("NAXIS4", 1),
    card("BUNIT", "JY/BEAM"),
    card("CTYPE1", "RA---SIN"),
    card("CRVAL1", degrees(field.rightAscension)),
    card("CDELT1", degrees(-cell)),
    card("CRPIX1", real(size / 2 + 1)),
    card("CTYPE2", "DEC--SIN"),
    card("CRVAL2", degrees(field.declination)),
    card("CDELT2", degrees(cell)),
    card("CRPIX2", real(size / 2 + 1)),
    card("CTYPE3", "FREQ"),
    card("CRVAL3", real(1.4e9)),
    card("CDELT3", real(1e6)),
    card("CRPIX3", real(1)),
    card("CTYPE4", "STOKES"),
    card("CRVAL4", real(1)),
    card("CDELT4", real(1)),
    card("CRPIX4", real(1)),
    card("EQUINOX", real(2000)),
    ...(beam === undefined
      ? []
      : [card("BMAJ", degrees(beam)), card("BMIN", degrees(beam)), card("BPA", real(0))]),
  ]);
  const data = bigEndian(Float32Array.from(pixels));
  return Buffer.concat([header, data, dataPadding(data.length)]);
}

export function writeImage(path: string, ...rest: Parameters<typeof imageBytes>): void {
  writeFileSync(path, imageBytes(...rest));
}
