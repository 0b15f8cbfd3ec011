/** The fields of several files as those of one dataset: the same name and the same place are the same field. */
import { InputError } from "../../util/errors.ts";
import type { Field } from "../dataset.ts";
import type { Notes } from "../notes.ts";

/** Radians between phase centres of one field: 0.1 arcsec, what two ways of writing one position differ by. */
const SAME_PLACE = (0.1 / 3600) * (Math.PI / 180);

export class JoinedFields {
  readonly #notes: Notes;
  readonly #fields: Field[] = [];
  readonly #ids = new Set<number>();
  #next = 1;
  #renumbered = 0;
  #apart = new Set<string>();

  constructor(notes: Notes) {
    this.#notes = notes;
  }

  /**
   * @returns ids of the file that are others in the dataset; undefined where none is
   * @throws InputError where a field is given at another equinox
   */
  add(fields: readonly Field[], path: string): ReadonlyMap<number, number> | undefined {
    const ids = new Map<number, number>();
    for (const field of fields) {
      const { id } = this.#same(field, path) ?? this.#addNew(field);
      if (id !== field.id) ids.set(field.id, id);
    }
    if (ids.size > 0) this.#renumbered += 1;
    return ids.size === 0 ? undefined : ids;
  }

  finish(): Field[] {
    if (this.#renumbered > 0) {
      const files = this.#renumbered === 1 ? "one file" : `${this.#renumbered} files`;
      this.#notes.note(
        "fields-renumbered",
        `${files} number the fields otherwise than the first: fields are joined by name and position`,
      );
    }
    if (this.#apart.size > 0) {
      const names = [...this.#apart].slice(0, 8).join(", ");
      this.#notes.note(
        "field-positions-differ",
        `the files place the field ${names} differently: each phase centre is a field of its own`,
      );
    }
    return [...this.#fields];
  }

  #same(field: Field, path: string): Field | undefined {
    const named = this.#fields.filter((other) => key(other.name) === key(field.name));
    const other = named.find((one) => {
      return one.equinox !== field.equinox && !Number.isNaN(one.equinox) && !Number.isNaN(field.equinox);
    });
    if (other !== undefined) {
      throw new InputError(
        `the field "${field.name.trim()}" is given at equinox ${field.equinox}, in other files at ${other.equinox}: ` +
          "expected one equinox for its u, v, w",
        { file: path },
        "Convert the files to one equinox, or check each on its own",
      );
    }
    const same = named.find((one) => isNear(one, field));
    if (same === undefined && named.length > 0) this.#apart.add(field.name.trim());
    return same;
  }

  #addNew(field: Field): Field {
    let { id } = field;
    if (this.#ids.has(id)) {
      while (this.#ids.has(this.#next)) this.#next += 1;
      id = this.#next;
    }
    this.#ids.add(id);
    const added = { ...field, id };
    this.#fields.push(added);
    return added;
  }
}

function key(name: string): string {
  return name.trim().toUpperCase();
}

/** Unknown places are anywhere. */
function isNear(one: Field, other: Field): boolean {
  const north = one.declination - other.declination;
  const turned = one.rightAscension - other.rightAscension;
  const east = (turned - 2 * Math.PI * Math.round(turned / (2 * Math.PI))) * Math.cos(one.declination);
  const apart = Math.hypot(north, east);
  return Number.isNaN(apart) || apart < SAME_PLACE;
}
