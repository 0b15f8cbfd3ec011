/**
 * Everything a FITS file of visibilities is written with. A file is: `groupsHeader`, the groups (`bigEndian`),
 * zeros to a whole block (`dataPadding`), then `binaryTable` for each table; `FitsFileWriter` puts it on disk.
 */
export { FitsFileWriter } from "./write-file.ts";
export {
  type AxisToWrite,
  bigEndian,
  type GroupsToWrite,
  groupItems,
  groupsBytes,
  groupsHeader,
  type ParameterToWrite,
} from "./write-groups.ts";
export { BLOCK, type CardToWrite, card, headerBlocks, padding, type Real, real } from "./write-header.ts";
export {
  binaryTable,
  type CellToWrite,
  type ColumnToWrite,
  streamedTable,
  type TableToStream,
  type TableToWrite,
} from "./write-table.ts";

import { padding } from "./write-header.ts";

/** The zero bytes that end a data unit of `length` bytes on a block. */
export function dataPadding(length: number): Uint8Array {
  return new Uint8Array(padding(length));
}
