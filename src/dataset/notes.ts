/** Notes as they gather while a file is opened. */
import type { Note } from "./dataset.ts";

/** Of one code, so that a table full of the same oddity does not bury the others. */
const MOST_OF_ONE_CODE = 5;

export class Notes {
  readonly #notes: Note[] = [];
  readonly #more = new Map<string, number>();

  /** Something that the format allows and science does not. */
  fault(code: string, text: string): void {
    this.#add({ code, kind: "fault", text });
  }

  /** A quirk worth saying. */
  note(code: string, text: string): void {
    this.#add({ code, kind: "note", text });
  }

  #add(note: Note): void {
    const same = this.#notes.filter(({ code }) => code === note.code).length;
    if (same < MOST_OF_ONE_CODE) this.#notes.push(note);
    else this.#more.set(note.code, (this.#more.get(note.code) ?? 0) + 1);
  }

  /** In the order they came; the last of a code says how many more there were. */
  list(): Note[] {
    return this.#notes.map((note, i) => {
      const more = this.#more.get(note.code) ?? 0;
      const last = !this.#notes.slice(i + 1).some(({ code }) => code === note.code);
      return more > 0 && last ? { ...note, text: `${note.text} (and ${more} more of this kind)` } : note;
    });
  }
}
