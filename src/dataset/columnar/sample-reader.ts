/** Values, weights and flags of table rows, one a row or a list a row, into the working copy. */
import { InputError } from "../../util/errors.ts";
import { isNothing, isSet, listIn, numberIn, type Where } from "./cells.ts";
import type { ColumnUses, Role } from "./column-map.ts";
import type { SpoolWriter } from "./spool-writer.ts";
import { toSi } from "./units.ts";

type Cells = ReadonlyMap<Role, ArrayLike<unknown>>;

/** One column of samples: its cells, or the elements of the list at hand. */
interface Source {
  readonly column: string;
  cells: ArrayLike<unknown>;
  /** elements of the row's list; `cells` itself where there are no lists */
  elements: ArrayLike<unknown>;
}

export class SampleReader {
  readonly #offsets: Int32Array;
  readonly #lists: boolean;
  readonly #counts: { empty: number };
  readonly #writer: SpoolWriter;
  readonly #sources = new Map<Role, Source>();
  readonly #re: Source;
  readonly #im: Source;
  readonly #polar: boolean;
  readonly #radians: (phase: number) => number;
  readonly #weight: Source | undefined;
  readonly #sigma: Source | undefined;
  readonly #flag: Source | undefined;

  constructor(
    uses: ColumnUses,
    offsets: Int32Array,
    lists: boolean,
    counts: { empty: number },
    writer: SpoolWriter,
  ) {
    this.#offsets = offsets;
    this.#lists = lists;
    this.#counts = counts;
    this.#writer = writer;
    const source = (role: Role): Source | undefined => {
      const use = uses[role];
      if (use === undefined) return undefined;
      const made: Source = { column: use.column, cells: [], elements: [] };
      this.#sources.set(role, made);
      return made;
    };
    this.#polar = uses.real === undefined;
    this.#re = source(this.#polar ? "amplitude" : "real")!;
    this.#im = source(this.#polar ? "phase" : "imag")!;
    this.#radians = this.#polar ? toSi("phase", uses.phase!) : (value) => value;
    this.#weight = source("weight");
    this.#sigma = this.#weight === undefined ? source("sigma") : undefined;
    this.#flag = source("flag");
  }

  /** The cells of the batch at hand. */
  take(cells: Cells): void {
    for (const [role, source] of this.#sources) {
      source.cells = cells.get(role)!;
      source.elements = source.cells;
    }
  }

  /**
   * @param at row of the batch
   * @param row of the working copy
   * @param first sample that the row's columns name
   */
  put(at: number, row: number, first: number, where: Where): void {
    if (!this.#lists) {
      this.#putOne(at, row, first, where);
      return;
    }
    const length = this.#offsets.length;
    for (const source of this.#sources.values()) {
      const elements = this.#elementsOf(source, at, length, where);
      // Nothing in the cell: the samples of the row never came.
      if (elements === null) return;
      source.elements = elements;
    }
    for (let i = 0; i < length; i++) this.#putOne(i, row, first + this.#offsets[i]!, where);
  }

  #elementsOf(source: Source, at: number, length: number, where: Where): ArrayLike<unknown> | null {
    const cell = source.cells[at];
    // One flag, weight or sigma may be said of a whole row.
    const single =
      typeof cell === "number" ||
      typeof cell === "bigint" ||
      typeof cell === "boolean" ||
      (typeof cell === "string" && !cell.includes("["));
    const whole = source === this.#flag || source === this.#weight || source === this.#sigma;
    if (single && whole && !isNothing(cell)) return new Array<unknown>(length).fill(cell);
    const list = listIn(cell, source.column, where);
    if (list === null || list.length === length) return list;
    throw new InputError(
      `the list in column "${source.column}" has ${list.length} elements: expected ${length}`,
      where(),
    );
  }

  #putOne(at: number, row: number, sample: number, where: Where): void {
    const re = this.#re.elements[at];
    const im = this.#im.elements[at];
    if (isNothing(re) || isNothing(im)) {
      this.#counts.empty += 1;
      this.#writer.put(row, sample, 0, 0, 0);
      return;
    }
    let real = numberIn(re, this.#re.column, where);
    let imag = numberIn(im, this.#im.column, where);
    if (this.#polar) {
      const phase = this.#radians(imag);
      imag = real * Math.sin(phase);
      real *= Math.cos(phase);
    }
    this.#writer.put(row, sample, real, imag, this.#weightAt(at, where));
  }

  #weightAt(at: number, where: Where): number {
    let weight = 1;
    if (this.#weight !== undefined) {
      const cell = this.#weight.elements[at];
      if (isNothing(cell)) {
        this.#counts.empty += 1;
        return 0;
      }
      weight = numberIn(cell, this.#weight.column, where);
    } else if (this.#sigma !== undefined) {
      const sigma = numberIn(this.#sigma.elements[at], this.#sigma.column, where);
      // A negative sigma is how flags are put there.
      weight = (sigma < 0 ? -1 : 1) / (sigma * sigma);
    }
    const flag = this.#flag;
    return flag !== undefined && isSet(flag.elements[at], flag.column, where) ? -Math.abs(weight) : weight;
  }
}
