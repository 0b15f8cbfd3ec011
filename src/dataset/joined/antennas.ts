/** The antennas of several files as those of one array: the same name is the same antenna, whatever its number. */
import { InputError } from "../../util/errors.ts";
import type { Antenna, ArrayInfo } from "../dataset.ts";
import type { Notes } from "../notes.ts";

/** Metres between positions of one antenna: tables are refined from day to day. */
const SAME_PLACE = 1;
/** Degrees between sidereal times that two tables give for the same moment: UT1 and the equinoxes differ by less. */
const SAME_SIDEREAL_TIME = 0.02;

/** Numbers of a file that are others in the dataset; undefined where none is. */
export type Renumbering = ReadonlyMap<number, number> | undefined;

export class JoinedAntennas {
  readonly #notes: Notes;
  readonly #antennas: Antenna[] = [];
  /** places in `#antennas` by name: an antenna that moved has several */
  readonly #byName = new Map<string, number[]>();
  readonly #numbers = new Set<number>();
  #next = 1;
  #info: ArrayInfo | undefined;
  #renumbered = 0;
  #moved = new Set<string>();

  constructor(notes: Notes) {
    this.#notes = notes;
  }

  /**
   * Take in the array of the next file.
   *
   * @throws InputError where it is another array
   */
  add(array: ArrayInfo, path: string): Renumbering {
    const known = this.#info;
    if (known !== undefined && this.#antennas.length > 0) this.#requireSameArray(known, array, path);
    this.#info = known === undefined ? array : this.#withClock(known, array, path);
    const numbers = new Map<number, number>();
    const taken = new Set<number>();
    for (const antenna of array.antennas) {
      const place = this.#placeOf(antenna, array, taken);
      taken.add(place);
      const { number } = this.#antennas[place]!;
      if (number !== antenna.number) numbers.set(antenna.number, number);
    }
    if (numbers.size > 0) this.#renumbered += 1;
    return numbers.size === 0 ? undefined : numbers;
  }

  /** The array of all files. */
  finish(): ArrayInfo {
    if (this.#renumbered > 0) {
      const files = this.#renumbered === 1 ? "one file" : `${this.#renumbered} files`;
      this.#notes.note(
        "antennas-renumbered",
        `${files} number the antennas otherwise than the first: antennas are joined by name, and the numbers are ` +
          "those of the first file, with new ones for the antennas it does not have",
      );
    }
    if (this.#moved.size > 0) {
      const names = [...this.#moved].slice(0, 8).join(", ");
      this.#notes.fault(
        "antenna-moved",
        `the files place antenna ${names} more than ${SAME_PLACE} m apart: each place counts as an antenna of its own`,
      );
    }
    return { ...this.#info!, antennas: [...this.#antennas] };
  }

  #requireSameArray(known: ArrayInfo, array: ArrayInfo, path: string): void {
    const sameName = known.name.trim().toUpperCase() === array.name.trim().toUpperCase();
    if (sameName || !array.fromTable || !known.fromTable) return;
    if (array.antennas.some(({ name }) => this.#byName.has(key(name)))) return;
    throw new InputError(
      `the array is "${array.name}" and shares no antenna with "${known.name}" of the other files`,
      { file: path },
      "These are different observations: check each on its own",
    );
  }

  /** Sidereal time comes from the first file that has it; the others must agree, each at its own reference date. */
  #withClock(known: ArrayInfo, array: ArrayInfo, path: string): ArrayInfo {
    const fresh = array.siderealTimeAtReference;
    if (fresh === null || array.referenceDay === null) return known;
    if (known.siderealTimeAtReference === null || known.referenceDay === null) {
      const { siderealTimeAtReference, referenceDay, degreesPerDay, ut1MinusUtc } = array;
      return { ...known, siderealTimeAtReference, referenceDay, degreesPerDay, ut1MinusUtc };
    }
    const days = array.referenceDay - known.referenceDay;
    const expected = known.siderealTimeAtReference + known.degreesPerDay * days;
    const apart = Math.abs(turnsOff(fresh - expected));
    if (apart > SAME_SIDEREAL_TIME) {
      this.#notes.fault(
        "sidereal-times-disagree",
        `${path}: the sidereal time (GSTIA0) at its reference date (RDATE) is ${apart.toFixed(3)} deg from that of the ` +
          "first file, which counts",
      );
    }
    return known;
  }

  #placeOf(antenna: Antenna, array: ArrayInfo, taken: ReadonlySet<number>): number {
    const name = key(antenna.name);
    const places = this.#byName.get(name) ?? [];
    const position = array.frame === this.#info!.frame ? antenna.position : null;
    const place = places.find((one) => {
      // Antennas without names of their own are their numbers; two of one name in a table are two.
      return !taken.has(one) && near(this.#antennas[one]!.position, position);
    });
    if (place !== undefined) {
      this.#fillIn(place, antenna, position);
      return place;
    }
    if (places.some((one) => !taken.has(one))) this.#moved.add(antenna.name.trim());
    this.#antennas.push({ ...antenna, position, number: this.#freeNumber(antenna.number) });
    this.#byName.set(name, [...places, this.#antennas.length - 1]);
    return this.#antennas.length - 1;
  }

  /** What one file knows of an antenna and an earlier one does not. */
  #fillIn(place: number, { diameter }: Antenna, position: Antenna["position"]): void {
    const known = this.#antennas[place]!;
    if (known.position !== null && known.diameter !== null) return;
    this.#antennas[place] = {
      ...known,
      position: known.position ?? position,
      diameter: known.diameter ?? diameter,
    };
  }

  #freeNumber(wanted: number): number {
    let number = wanted;
    if (this.#numbers.has(number)) {
      while (this.#numbers.has(this.#next)) this.#next += 1;
      number = this.#next;
    }
    this.#numbers.add(number);
    return number;
  }
}

function key(name: string): string {
  return name.trim().toUpperCase();
}

function near(one: Antenna["position"], other: Antenna["position"]): boolean {
  if (one === null || other === null) return true;
  return Math.hypot(one[0] - other[0], one[1] - other[1], one[2] - other[2]) < SAME_PLACE;
}

/** -180 to 180. */
function turnsOff(degrees: number): number {
  return degrees - 360 * Math.round(degrees / 360);
}
