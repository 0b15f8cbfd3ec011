/** The different names or numbers in a column, and from them to the numbers that rows use. */
import { InputError } from "../../util/errors.ts";
import { labelIn, type Where } from "./cells.ts";

export type Label = string | number;

/** A column's different values, in no order, up to a limit. */
export class Labels {
  readonly column: string;
  readonly values = new Set<Label>();
  readonly #what: string;
  readonly #most: number;
  #lastCell: unknown = undefined;
  #last: Label = 0;

  /** @param what for messages, such as "antennas" */
  constructor(column: string, what: string, most: number) {
    this.column = column;
    this.#what = what;
    this.#most = most;
  }

  /** @throws InputError when there is nothing in the cell, or too many different ones */
  add(cell: unknown, where: Where): Label {
    if (cell === this.#lastCell) return this.#last;
    const label = labelIn(cell);
    if (label === null) {
      throw new InputError(`there is nothing in column "${this.column}"`, where(), "Every row needs one");
    }
    if (!this.values.has(label)) {
      if (this.values.size >= this.#most) {
        throw new InputError(
          `column "${this.column}" names more than ${this.#most} ${this.#what}`,
          where(),
          "It probably holds something else: say what in the column map",
        );
      }
      this.values.add(label);
    }
    this.#lastCell = cell;
    this.#last = label;
    return label;
  }

  /** Numbers ascending, then text in order, numbers within it by size. */
  sorted(): Label[] {
    return [...this.values].sort(compareLabels);
  }
}

const COLLATOR = new Intl.Collator("en", { numeric: true, caseFirst: "upper" });

function compareLabels(a: Label, b: Label): number {
  if (typeof a === "number" && typeof b === "number") return a - b;
  if (typeof a !== typeof b) return typeof a === "number" ? -1 : 1;
  return COLLATOR.compare(String(a), String(b)) || (a < b ? -1 : a > b ? 1 : 0);
}

/** Cell to number, remembering the last: neighbours are mostly alike. */
export class Coding {
  readonly #codes: ReadonlyMap<Label, number>;
  readonly #column: string;
  #lastCell: unknown = undefined;
  #last = 0;

  constructor(codes: ReadonlyMap<Label, number>, column: string) {
    this.#codes = codes;
    this.#column = column;
  }

  /** @throws InputError for what the first reading of the table did not meet */
  code(cell: unknown, where: Where): number {
    if (cell === this.#lastCell) return this.#last;
    const label = labelIn(cell);
    const code = label === null ? undefined : this.#codes.get(label);
    if (code === undefined) {
      throw new InputError(
        `column "${this.#column}" holds what it did not hold a moment ago`,
        where(),
        "The file is being written: wait until it is whole",
      );
    }
    this.#lastCell = cell;
    this.#last = code;
    return code;
  }
}
