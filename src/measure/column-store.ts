/** Typed arrays that grow together, a row at a time. */

export type Numbers = Float32Array | Float64Array | Int32Array | Uint32Array;
type Maker<A extends Numbers> = new (length: number) => A;

export class GrowingColumn<A extends Numbers> {
  array: A;
  private readonly make: Maker<A>;
  /** numbers a row */
  readonly width: number;

  constructor(make: Maker<A>, width = 1) {
    this.make = make;
    this.width = width;
    this.array = new make(0);
  }

  /** Make room for `rows` rows; half as much again, so that growing stays cheap. */
  reserve(rows: number): void {
    const needed = rows * this.width;
    if (this.array.length >= needed) return;
    const grown = new this.make(Math.max(needed, Math.ceil(this.array.length * 1.5), 1024 * this.width));
    grown.set(this.array);
    this.array = grown;
  }

  /** Rows in the given order, in an array of their own. */
  gather(order: ArrayLike<number>): A {
    const { array, width } = this;
    const out = new this.make(order.length * width);
    for (let i = 0; i < order.length; i++) {
      const from = order[i]! * width;
      for (let k = 0; k < width; k++) out[i * width + k] = array[from + k]!;
    }
    return out;
  }
}
