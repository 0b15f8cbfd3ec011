/** The first reading of the tables: which antennas, fields, sub-bands, channels and so on there are. */
import { InputError } from "../../util/errors.ts";
import { isNothing, listIn, numberIn } from "./cells.ts";
import { type ColumnUses, type Role, SAMPLE_ROLES } from "./column-map.ts";
import { type Label, Labels } from "./labels.ts";
import { type Batch, rowPlace, type Table } from "./table.ts";
import { toSi } from "./units.ts";

export type LabelRole = "antenna1" | "subband" | "channel" | "polarization" | "field" | "setup" | "subarray";

/** What the label is of, for messages, and the most there can be. */
const LIMITS: Readonly<Record<LabelRole, readonly [what: string, most: number]>> = {
  antenna1: ["antennas", 65_536],
  subband: ["sub-bands", 4096],
  channel: ["channels", 1 << 20],
  polarization: ["polarizations", 12],
  field: ["fields", 65_536],
  setup: ["frequency setups", 4096],
  subarray: ["sub-arrays", 9999],
};
const MOST_FREQUENCIES = 1 << 22;

/** Frequencies of one setup and sub-band, Hz. */
export interface FoundFrequencies {
  readonly setup: Label;
  readonly subband: Label;
  /** by channel label, where there is a column of channels */
  readonly byChannel: ReadonlyMap<Label, number>;
  /** the different ones, where there is none */
  readonly different: ReadonlySet<number>;
  /** of a list column: in the order of the list */
  readonly listed: readonly number[] | undefined;
}

export interface FoundLabels {
  /** antennas are those of both columns */
  readonly labels: ReadonlyMap<LabelRole, Labels>;
  readonly frequencies: readonly FoundFrequencies[];
  /** elements of the first list of values; undefined: the columns hold no lists */
  readonly listLength: number | undefined;
  readonly tableRows: number;
}

interface Book {
  readonly setup: Label;
  readonly subband: Label;
  readonly byChannel: Map<Label, number>;
  readonly different: Set<number>;
  listed: readonly number[] | undefined;
}

/** Where there is no such column. */
const NONE: Label = 0;

/** @throws InputError at the row where something is wrong */
export async function findLabels(
  tables: readonly Table[],
  uses: ColumnUses,
  lists: boolean,
): Promise<FoundLabels> {
  const finder = new Finder(uses, lists);
  for (const table of tables) {
    for await (const batch of table.batches(finder.columns)) finder.add(batch, table.file);
  }
  return finder.found();
}

class Finder {
  readonly columns: readonly string[];
  readonly #uses: ColumnUses;
  readonly #labels = new Map<LabelRole, Labels>();
  readonly #books = new Map<string, Book>();
  readonly #listColumn: string | undefined;
  readonly #frequency: ((cell: number) => number) | undefined;
  #frequencies = 0;
  #listLength: number | undefined;
  #rows = 0;

  constructor(uses: ColumnUses, lists: boolean) {
    this.#uses = uses;
    for (const role of Object.keys(LIMITS) as LabelRole[]) {
      const use = uses[role];
      if (use !== undefined) this.#labels.set(role, new Labels(use.column, ...LIMITS[role]));
    }
    this.#listColumn = lists ? SAMPLE_ROLES.flatMap((role) => uses[role]?.column ?? [])[0] : undefined;
    this.#frequency = uses.frequency === undefined ? undefined : toSi("frequency", uses.frequency);
    const roles: Role[] = [...this.#labels.keys(), "antenna2", "frequency"];
    const names = roles.flatMap((role) => uses[role]?.column ?? []);
    this.columns = this.#listColumn === undefined ? names : [...names, this.#listColumn];
  }

  add(batch: Batch, file: string): void {
    for (const [role, labels] of this.#labels) {
      this.#addColumn(labels, batch.column(labels.column), batch, file);
      if (role === "antenna1") {
        this.#addColumn(labels, batch.column(this.#uses.antenna2!.column), batch, file);
      }
    }
    if (this.#frequency !== undefined) this.#addFrequencies(batch, file);
    this.#measureList(batch, file);
    this.#rows += batch.rows;
  }

  #addColumn(labels: Labels, cells: ArrayLike<unknown>, batch: Batch, file: string): void {
    let row = 0;
    const where = () => rowPlace(file, batch, row);
    for (; row < batch.rows; row++) labels.add(cells[row], where);
  }

  #addFrequencies(batch: Batch, file: string): void {
    const column = this.#uses.frequency!.column;
    const convert = this.#frequency!;
    const cells = batch.column(column);
    const part = (role: LabelRole) => {
      const labels = this.#labels.get(role);
      return labels === undefined ? undefined : { labels, cells: batch.column(labels.column) };
    };
    const [setup, subband, channel] = [part("setup"), part("subband"), part("channel")];
    let row = 0;
    const where = () => rowPlace(file, batch, row);
    const labelOf = (of: ReturnType<typeof part>) =>
      of === undefined ? NONE : of.labels.add(of.cells[row], where);
    for (; row < batch.rows; row++) {
      const book = this.#book(labelOf(setup), labelOf(subband));
      const cell = cells[row];
      if (typeof cell === "object" || (typeof cell === "string" && cell.startsWith("["))) {
        book.listed ??= Array.from(listIn(cell, column, where) ?? [], (element) =>
          convert(numberIn(element, column, where)),
        );
        continue;
      }
      const hertz = convert(numberIn(cell, column, where));
      if (Number.isNaN(hertz)) {
        throw new InputError(`there is no frequency in column "${column}"`, where(), "Every row needs one");
      }
      if (channel === undefined) book.different.add(hertz);
      else this.#addOfChannel(book, labelOf(channel), hertz, column, where);
      this.#count(book, where);
    }
  }

  #addOfChannel(book: Book, label: Label, hertz: number, column: string, where: () => object): void {
    const earlier = book.byChannel.get(label);
    if (earlier === undefined) book.byChannel.set(label, hertz);
    else if (Math.abs(earlier - hertz) > 1e-7 * Math.abs(earlier)) {
      throw new InputError(
        `channel ${label} is at ${hertz} Hz by column "${column}", and at ${earlier} Hz in a row before`,
        where(),
        "Channels of several frequency setups need a column that names the setup",
      );
    }
  }

  #count(book: Book, where: () => object): void {
    const size = book.byChannel.size + book.different.size;
    if (size <= MOST_FREQUENCIES && this.#frequencies <= MOST_FREQUENCIES) return;
    throw new InputError(`there are more than ${MOST_FREQUENCIES} different frequencies`, where());
  }

  #book(setup: Label, subband: Label): Book {
    const key = `${typeof setup}:${setup}|${typeof subband}:${subband}`;
    let book = this.#books.get(key);
    if (book === undefined) {
      book = { setup, subband, byChannel: new Map(), different: new Set(), listed: undefined };
      this.#books.set(key, book);
      this.#frequencies += 1;
    }
    return book;
  }

  #measureList(batch: Batch, file: string): void {
    if (this.#listColumn === undefined || this.#listLength !== undefined) return;
    const cells = batch.column(this.#listColumn);
    for (let row = 0; row < batch.rows; row++) {
      if (isNothing(cells[row])) continue;
      const list = listIn(cells[row], this.#listColumn, () => rowPlace(file, batch, row));
      this.#listLength = list?.length;
      return;
    }
  }

  found(): FoundLabels {
    return {
      labels: this.#labels,
      frequencies: [...this.#books.values()],
      listLength: this.#listLength,
      tableRows: this.#rows,
    };
  }
}
