/** The item types of FITS arrays. All big-endian (FITS Standard 4.0, section 5). */

/** The item at byte `at`; 64-bit integers beyond 2^53 lose their last digits. */
export function readStored(view: DataView, bitpix: number, at: number): number {
  switch (bitpix) {
    case -32:
      return view.getFloat32(at);
    case -64:
      return view.getFloat64(at);
    case 8:
      return view.getUint8(at);
    case 16:
      return view.getInt16(at);
    case 32:
      return view.getInt32(at);
    default:
      return Number(view.getBigInt64(at));
  }
}
