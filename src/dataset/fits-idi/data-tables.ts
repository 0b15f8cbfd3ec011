/** The UV_DATA tables of a file: pieces of one observation, one after another, with one set of axes. */
import type { ByteSource } from "../fits/byte-source.ts";
import type { Hdu } from "../fits/hdus.ts";
import { tableLayout } from "../fits/table-layout.ts";
import { axisValue } from "../fits-tables/axes.ts";
import type { Notes } from "../notes.ts";
import { type UvLayout, uvLayout } from "./uv-layout.ts";

/**
 * Those that hold rows.
 *
 * @throws InputError when none does, or their axes differ
 */
export async function readUvLayouts(
  source: ByteSource,
  hdus: readonly Hdu[],
  notes: Notes,
): Promise<readonly [UvLayout, ...UvLayout[]]> {
  const filled = hdus.filter(({ header }) => (header.integer("NAXIS2", 0) ?? 0) > 0);
  if (filled.length < hdus.length && filled.length > 0) {
    const text = `${hdus.length - filled.length} of ${hdus.length} UV_DATA tables have no rows (NAXIS2 = 0)`;
    notes.note("empty-data-table", text);
  }
  const [first, ...others] = filled.map((hdu) => uvLayout(hdu, notes));
  if (first === undefined) throw await noRows(source, hdus.at(-1)!);
  for (const other of others) requireSameAxes(first, other, notes);
  return [first, ...others];
}

/** A header that was written before the data says 0: how many rows would fit into the file behind it. */
async function noRows(source: ByteSource, hdu: Hdu) {
  const { rowBytes } = tableLayout(hdu);
  const cursor = await source.cursor(hdu.dataStart);
  const end = await cursor.reach(Number.MAX_SAFE_INTEGER).finally(() => cursor.close());
  const fit = rowBytes === 0 ? 0 : Math.max(0, Math.floor((end - hdu.dataStart) / rowBytes));
  const found = "NAXIS2 is 0: the table holds no visibilities";
  if (fit === 0) return hdu.header.error(found, "NAXIS2");
  return hdu.header.error(
    `${found}; ${fit} rows of ${rowBytes} bytes would fit between the header and the end of the file`,
    "NAXIS2",
    "The header was probably written before the data and never corrected: close the file properly with its writer",
  );
}

function requireSameAxes(first: UvLayout, other: UvLayout, notes: Notes): void {
  const differing = (["stokes", "frequency", "subband"] as const).find(
    (name) => first[name].length !== other[name].length,
  );
  if (differing !== undefined) {
    const axis = other[differing];
    throw other.hdu.header.error(
      `the ${axis.type || differing.toUpperCase()} axis has length ${axis.length}, that of ${first.hdu.header.place.part} ` +
        `${first[differing].length}: expected the same in all UV_DATA tables`,
      axis.lengthKey || undefined,
      "Put tables of different shape into files of their own",
    );
  }
  for (let i = 0; i < first.stokes.length; i++) {
    const [one, two] = [axisValue(first.stokes, i), axisValue(other.stokes, i)];
    if (one === two) continue;
    throw other.hdu.header.error(
      `element ${i + 1} of the STOKES axis has code ${two}, that of ${first.hdu.header.place.part} ${one}: expected the ` +
        "same in all UV_DATA tables",
      `CRVAL${other.stokes.number}`,
    );
  }
  const [one, two] = [first.frequency, other.frequency];
  if (Math.abs(two.value - one.value) > 1e-9 * Math.abs(one.value) || two.pixel !== one.pixel) {
    const text =
      `${other.hdu.header.place.part}: the FREQ axis begins at ${two.value} Hz (pixel ${two.pixel}), that of ` +
      `${first.hdu.header.place.part} at ${one.value} Hz (pixel ${one.pixel}): the first counts`;
    notes.fault("data-tables-disagree", text);
  }
}
