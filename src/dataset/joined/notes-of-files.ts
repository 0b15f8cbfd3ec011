/** The notes of many files: what several say alike is said once, with how many they are. */
import type { Note } from "../dataset.ts";
import { Notes } from "../notes.ts";

/** Different texts that are told apart; a thousand files with an oddity of their own each need no more. */
const MOST_TEXTS = 1000;

export class NotesOfFiles {
  readonly #files: number;
  readonly #said = new Map<string, { readonly note: Note; readonly first: string; files: number }>();

  constructor(files: number) {
    this.#files = files;
  }

  add(file: string, notes: readonly Note[]): void {
    for (const note of notes) {
      const key = `${note.kind} ${note.code} ${note.text}`;
      const known = this.#said.get(key);
      if (known !== undefined) known.files += 1;
      else if (this.#said.size < MOST_TEXTS) this.#said.set(key, { note, first: file, files: 1 });
    }
  }

  list(): Note[] {
    const notes = new Notes();
    for (const { note, first, files } of this.#said.values()) {
      const where =
        files === this.#files ? "" : files === 1 ? `${first}: ` : `${first} and ${files - 1} more files: `;
      if (note.kind === "fault") notes.fault(note.code, where + note.text);
      else notes.note(note.code, where + note.text);
    }
    return notes.list();
  }
}
