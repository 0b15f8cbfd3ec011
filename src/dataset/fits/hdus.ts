/**
 * The walk over a file's header-data units: every header is read, no data. FITS Standard 4.0, sections 3, 4.4.1 and 6.
 */
import { InputError, type Place } from "../../util/errors.ts";
import { Notes } from "../notes.ts";
import type { ByteSource, Cursor } from "./byte-source.ts";
import { type Header, readHeader } from "./header.ts";
import { BLOCK } from "./write-header.ts";

export type HduKind = "random groups" | "image" | "binary table" | "text table" | "other";

export interface Hdu {
  /** from 1 */
  readonly index: number;
  readonly kind: HduKind;
  readonly header: Header;
  /** EXTNAME, upper case; empty without one. Hostile text */
  readonly name: string;
  /** EXTVER, default 1 */
  readonly version: number;
  readonly headerStart: number;
  readonly dataStart: number;
  /** without padding */
  readonly dataBytes: number;
  /** held where going back for them would mean to start again: small extensions of a gzipped file */
  readonly held: Uint8Array | undefined;
}

export interface FitsFile {
  readonly source: ByteSource;
  readonly hdus: readonly [Hdu, ...Hdu[]];
  /** what the walk noticed; readers add theirs */
  readonly notes: Notes;
}

/** FITS Standard 4.0, section 4.4.1: 0 to 999 axes. */
const MOST_AXES = 999;
/** More is an attack: the largest files known have some hundreds. */
const MOST_HDUS = 10_000;
const MOST_HELD_BYTES = 8 * 1024 * 1024;
const BITPIX = [8, 16, 32, 64, -32, -64];

/**
 * Read every header.
 *
 * @throws InputError when the file is not FITS, or a header or the data it promises is malformed or cut short
 */
export async function openFits(source: ByteSource): Promise<FitsFile> {
  const cursor = await source.cursor();
  try {
    await requireFits(source, cursor);
    return await walk(source, cursor);
  } finally {
    await cursor.close();
  }
}

async function walk(source: ByteSource, cursor: Cursor): Promise<FitsFile> {
  const notes = new Notes();
  const first = await readHdu(source, cursor, 1, 0, notes);
  const hdus: [Hdu, ...Hdu[]] = [first];
  const keyword = new Uint8Array(8);
  let heldBytes = 0;
  for (let hdu: Hdu = first; ; ) {
    const next = await endOfData(cursor, hdu, notes);
    const got = await cursor.read(keyword, next);
    if (got === 0) break;
    if (Buffer.from(keyword).toString("latin1") !== "XTENSION" || got < 8) {
      const text = `bytes after HDU ${hdu.index}, from byte ${next} on, belong to no HDU and are left out`;
      notes.note("trailing-bytes", text);
      break;
    }
    if (hdus.length === MOST_HDUS) {
      throw new InputError(`more than ${MOST_HDUS} HDUs: expected a visibility file`, {
        file: source.path,
        byte: next,
      });
    }
    hdu = await readHdu(source, cursor, hdu.index + 1, next, notes);
    if (source.sequential && heldBytes + hdu.dataBytes <= MOST_HELD_BYTES) {
      hdu = { ...hdu, held: await hold(cursor, hdu) };
      heldBytes += hdu.dataBytes;
    }
    hdus.push(hdu);
  }
  return { source, hdus, notes };
}

async function hold(cursor: Cursor, hdu: Hdu): Promise<Uint8Array> {
  const bytes = new Uint8Array(hdu.dataBytes);
  const got = await cursor.read(bytes, hdu.dataStart);
  if (got < bytes.length) throw truncated(hdu, hdu.dataStart + got);
  return bytes;
}

/** The first card says whether this is FITS; other formats met in practice are named. */
async function requireFits(source: ByteSource, cursor: Cursor): Promise<void> {
  const start = Buffer.alloc(30);
  const got = await cursor.read(start, 0);
  if (/^SIMPLE {2}= +[TF]/.test(start.toString("latin1", 0, got))) return;
  const place = { file: source.path, byte: 0 };
  const known = KNOWN_STARTS.find(({ bytes }) => bytes.every((byte, i) => start[i] === byte));
  if (known !== undefined) throw new InputError(`this is ${known.what}`, place, known.advice);
  if (start.toString("latin1", 0, 6) === "SIMPLE") {
    throw new InputError("the first card is malformed: expected SIMPLE  = T", place, "The file is damaged");
  }
  throw new InputError(
    "this is not a FITS file: expected the first card to be SIMPLE  = T",
    place,
    "visvet reads random-groups FITS and FITS-IDI files, plain or gzipped",
  );
}

const UNPACK = "Unpack it first; only gzip is unpacked on the way";
const KNOWN_STARTS = [
  { bytes: [0x42, 0x5a, 0x68], what: "a bzip2 file", advice: UNPACK },
  { bytes: [0xfd, 0x37, 0x7a, 0x58, 0x5a], what: "an xz file", advice: UNPACK },
  { bytes: [0x28, 0xb5, 0x2f, 0xfd], what: "a zstd file", advice: UNPACK },
  { bytes: [0x1f, 0x9d], what: "a file packed by compress (.Z)", advice: UNPACK },
  { bytes: [0x50, 0x4b, 0x03, 0x04], what: "a zip archive", advice: UNPACK },
  {
    bytes: [0x89, 0x48, 0x44, 0x46],
    what: "an HDF5 file",
    advice: "visvet reads random-groups FITS and FITS-IDI files, plain or gzipped",
  },
];

async function readHdu(
  source: ByteSource,
  cursor: Cursor,
  index: number,
  headerStart: number,
  notes: Notes,
): Promise<Hdu> {
  const file = source.path;
  const { header: raw, end: dataStart } = await readHeader(cursor, headerStart, {
    file,
    part: `HDU ${index}`,
  });
  const name = (raw.shown("EXTNAME") ?? "").trim().toUpperCase();
  const kind = kindOf(raw, index);
  const header = raw.at(placeOf(file, index, kind, name));
  if (index === 1 && header.logical("SIMPLE") === false) {
    const text = "SIMPLE is F: the writer says that the file does not follow the FITS standard";
    notes.note("not-standard-fits", text);
  }
  if (header.contradictions.length > 0) {
    const text = `${header.place.part} gives twice, and differently: ${header.contradictions.slice(0, 10).join(", ")}; the first counts`;
    notes.note("keyword-twice", text);
  }
  const dataBytes = dataBytesOf(header, kind);
  const version = header.looseNumber("EXTVER") ?? 1;
  return { index, kind, header, name, version, headerStart, dataStart, dataBytes, held: undefined };
}

function placeOf(file: string, index: number, kind: HduKind, name: string): Place {
  const role = index === 1 ? `primary${kind === "random groups" ? ", random groups" : ""}` : name || kind;
  return { file, part: `HDU ${index} (${role})` };
}

function kindOf(header: Header, index: number): HduKind {
  if (index === 1) return isRandomGroups(header) ? "random groups" : "image";
  switch ((header.shown("XTENSION") ?? "").trim().toUpperCase()) {
    case "BINTABLE":
    // The prototype of BINTABLE, the same but for variable-length arrays (FITS Standard 4.0, appendix F).
    case "A3DTABLE":
      return "binary table";
    case "TABLE":
      return "text table";
    case "IMAGE":
      return "image";
    default:
      return "other";
  }
}

/** NAXIS1 = 0 together with GROUPS = T; GROUPS alone is set by other kinds of interchange file, too. */
function isRandomGroups(header: Header): boolean {
  return (
    header.shown("GROUPS") === "T" && header.shown("NAXIS1") === "0" && (header.looseNumber("NAXIS") ?? 0) > 0
  );
}

/** NAXISn, n from 1. @throws InputError for sizes that are no sizes */
export function axisLengths(header: Header): number[] {
  const axes = header.requiredInteger("NAXIS", 0, MOST_AXES);
  return Array.from({ length: axes }, (_, i) => header.requiredInteger(`NAXIS${i + 1}`, 0));
}

/** |BITPIX|/8 x GCOUNT x (PCOUNT + product of NAXISn) (eq. 2 and 4); the product skips NAXIS1 in random groups. */
function dataBytesOf(header: Header, kind: HduKind): number {
  const bitpix = bitpixOf(header);
  const lengths = axisLengths(header);
  const counted = kind === "random groups" ? lengths.slice(1) : lengths;
  const elements = counted.length === 0 ? 0 : counted.reduce((product, length) => product * length, 1);
  const primaryArray = kind === "image" && header.has("SIMPLE");
  // A primary array has neither; files of tables carry GCOUNT = 0 there, and no data.
  const parameters = primaryArray ? 0 : (header.integer("PCOUNT", 0) ?? 0);
  const groups = primaryArray ? 1 : (header.integer("GCOUNT", 0) ?? 1);
  const bytes = (Math.abs(bitpix) / 8) * groups * (parameters + elements);
  if (!Number.isSafeInteger(bytes)) {
    throw header.error(
      `the header promises ${bytes.toExponential(2)} bytes of data (NAXISn ${lengths.slice(0, 10).join(", ")}, PCOUNT ${parameters}, ` +
        `GCOUNT ${groups}): expected a size that a file can have`,
      "NAXIS",
      "The header is damaged",
    );
  }
  return bytes;
}

/** BITPIX. @throws InputError for a value that FITS does not have */
export function bitpixOf(header: Header): number {
  const bitpix = header.requiredInteger("BITPIX", -64, 64);
  if (!BITPIX.includes(bitpix)) {
    throw header.error(`BITPIX is ${bitpix}: expected one of ${BITPIX.join(", ")}`, "BITPIX");
  }
  return bitpix;
}

/** Check that the data are all there; gives the byte at which the next HDU starts. */
async function endOfData(cursor: Cursor, hdu: Hdu, notes: Notes): Promise<number> {
  const end = hdu.dataStart + hdu.dataBytes;
  const next = Math.ceil(end / BLOCK) * BLOCK;
  const reached = await cursor.reach(next);
  if (reached < end) throw truncated(hdu, reached);
  if (reached < next) {
    const text = `the file ends at byte ${reached}, without the padding of HDU ${hdu.index} to byte ${next}`;
    notes.note("missing-final-padding", text);
  }
  return next;
}

function truncated(hdu: Hdu, fileEnd: number): InputError {
  const { header, dataStart, dataBytes } = hdu;
  const end = dataStart + dataBytes;
  const [count, unit] = unitsOf(hdu);
  const unitBytes = count === 0 ? dataBytes : Math.floor(dataBytes / count);
  const whole = Math.max(0, Math.floor((fileEnd - dataStart) / unitBytes));
  const promise = count === 0 ? `${dataBytes} bytes of data` : `${count} ${unit}s of ${unitBytes} bytes`;
  const fit = Math.min(whole, count - 1);
  const inside = count === 0 ? "inside them" : `inside ${unit} ${fit + 1}: ${fit} of ${count} are whole`;
  return new InputError(
    `the header promises ${promise}, to byte ${end}; the file ends at byte ${fileEnd}, ${inside}`,
    { ...header.place, byte: count === 0 ? dataStart : dataStart + whole * unitBytes },
    "The copy is probably incomplete: compare its size with the original and copy it again",
  );
}

/** What the data are counted in: groups, or the rows of a table without a heap. */
function unitsOf({ header, kind }: Hdu): [number, string] {
  if (kind === "random groups") return [header.integer("GCOUNT", 0) ?? 1, "group"];
  const plainTable = kind.endsWith("table") && (header.integer("PCOUNT", 0) ?? 0) === 0;
  return plainTable ? [header.requiredInteger("NAXIS2", 0), "row"] : [0, "byte"];
}
