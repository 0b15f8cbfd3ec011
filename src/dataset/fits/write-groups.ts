/**
 * The random-groups primary header and its groups as big-endian bytes. FITS Standard 4.0, section 6.
 */
import { type CardToWrite, card, headerBlocks, real } from "./write-header.ts";

/** One axis of a group's array. */
export interface AxisToWrite {
  /** CTYPEn; left out of the header when empty */
  readonly type: string;
  readonly length: number;
  /** CRVALn, CDELTn, CRPIXn (default 1), CROTAn 0 */
  readonly value: number;
  readonly step: number;
  readonly pixel?: number;
}

export interface ParameterToWrite {
  /** PTYPEn */
  readonly name: string;
  /** physical = zero + scale x stored; defaults 1 and 0 */
  readonly scale?: number;
  readonly zero?: number;
}

export interface GroupsToWrite {
  readonly bitpix: 8 | 16 | 32 | 64 | -32 | -64;
  /** first axis fastest; COMPLEX comes first in practice */
  readonly axes: readonly AxisToWrite[];
  readonly parameters: readonly ParameterToWrite[];
  readonly groups: number;
  /** anything else: OBJECT, DATE-OBS, BUNIT, EPOCH, BSCALE, HISTORY ... */
  readonly cards?: readonly CardToWrite[];
  /** tables follow (EXTEND = T); default true */
  readonly extend?: boolean;
}

/** Stored items in one group: parameters, then the array. */
export function groupItems({ axes, parameters }: Pick<GroupsToWrite, "axes" | "parameters">): number {
  return parameters.length + axes.reduce((product, axis) => product * axis.length, 1);
}

/** Bytes of all groups, before padding (FITS Standard 4.0, eq. 4). */
export function groupsBytes(layout: GroupsToWrite): number {
  return (Math.abs(layout.bitpix) / 8) * layout.groups * groupItems(layout);
}

/** Primary header of a random-groups file. */
export function groupsHeader(layout: GroupsToWrite): Uint8Array {
  const cards: CardToWrite[] = [
    card("SIMPLE", true, "conforms to the FITS standard"),
    card("BITPIX", layout.bitpix),
    card("NAXIS", layout.axes.length + 1),
    card("NAXIS1", 0, "no array of its own: groups follow"),
  ];
  layout.axes.forEach((axis, i) => {
    cards.push(card(`NAXIS${i + 2}`, axis.length));
  });
  if (layout.extend ?? true) cards.push(card("EXTEND", true));
  cards.push(
    card("GROUPS", true),
    card("PCOUNT", layout.parameters.length),
    card("GCOUNT", layout.groups),
    ...(layout.cards ?? []),
  );
  layout.axes.forEach((axis, i) => {
    const n = i + 2;
    if (axis.type !== "") cards.push(card(`CTYPE${n}`, axis.type));
    cards.push(
      card(`CRVAL${n}`, real(axis.value)),
      card(`CDELT${n}`, real(axis.step)),
      card(`CRPIX${n}`, real(axis.pixel ?? 1)),
      card(`CROTA${n}`, real(0)),
    );
  });
  layout.parameters.forEach((parameter, i) => {
    cards.push(
      card(`PTYPE${i + 1}`, parameter.name),
      card(`PSCAL${i + 1}`, real(parameter.scale ?? 1)),
      card(`PZERO${i + 1}`, real(parameter.zero ?? 0)),
    );
  });
  return headerBlocks(cards);
}

/** `values` as big-endian bytes, the way FITS stores them; into `out` when it is given. */
export function bigEndian(
  values: Float32Array | Float64Array | Int16Array | Int32Array | Uint8Array | BigInt64Array,
  out: Uint8Array = new Uint8Array(values.byteLength),
): Uint8Array {
  if (out.byteLength !== values.byteLength) {
    throw new RangeError(`out holds ${out.byteLength} bytes, expected ${values.byteLength}`);
  }
  out.set(new Uint8Array(values.buffer, values.byteOffset, values.byteLength));
  if (!LITTLE_ENDIAN) return out;
  const bytes = Buffer.from(out.buffer, out.byteOffset, out.byteLength);
  if (values.BYTES_PER_ELEMENT === 2) bytes.swap16();
  else if (values.BYTES_PER_ELEMENT === 4) bytes.swap32();
  else if (values.BYTES_PER_ELEMENT === 8) bytes.swap64();
  return out;
}

const LITTLE_ENDIAN = new Uint8Array(Uint16Array.of(1).buffer)[0] === 1;
