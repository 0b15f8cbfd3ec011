/** Which cells of tables hold the samples that selections take: the same way that the tables are read. */
import type { SampleBlock } from "../dataset.ts";
import { newBlock } from "../new-block.ts";
import { Notes } from "../notes.ts";
import type { Selection } from "../selection.ts";
import { compileSelections, type SelectionMatcher } from "../selection-matcher.ts";
import { readAntennaFile } from "./antenna-file.ts";
import { resolveAxes } from "./axes.ts";
import type { ColumnMap } from "./column-map.ts";
import { resolveAntennas, resolveFields } from "./facts.ts";
import { findLabels } from "./find-labels.ts";
import { Gatherer, type SampleTaker } from "./gather.ts";
import type { SpoolRow } from "./spool-writer.ts";
import type { Batch, Table } from "./table.ts";

/** The rows of a batch, and which of their samples are taken. */
export interface PlacedBatch {
  readonly batch: Batch;
  /** elements of a list; 1 where a table row is one sample */
  readonly length: number;
  /** (rows x length) 1: taken */
  readonly taken: Uint8Array;
}

/** Tables in the order of the dataset: rows of one may go on in the next. */
export class FlagPlacer {
  readonly #gatherer: Gatherer;
  readonly #marker: Marker;
  /** columns read besides those that place a row */
  readonly #more: readonly string[];

  private constructor(gatherer: Gatherer, marker: Marker, more: readonly string[]) {
    this.#gatherer = gatherer;
    this.#marker = marker;
    this.#more = more;
  }

  /** @throws InputError where the tables are malformed */
  static async create(
    tables: readonly Table[],
    map: ColumnMap,
    selections: readonly Selection[],
    more: readonly string[],
  ): Promise<FlagPlacer> {
    const notes = new Notes();
    const { antennaFile, antennas, diameter } = map.constants;
    const found = await findLabels(tables, map.uses, map.lists.length > 0);
    const known = antennaFile === undefined ? (antennas ?? []) : await readAntennaFile(antennaFile, diameter);
    const axes = resolveAxes(map, found, notes, tables[0]!.file);
    const { antennaOf } = resolveAntennas(map, known, found, notes);
    const { fieldOf, onlyField } = resolveFields(map, found, notes);
    const { shape, polarizations } = axes;
    const matcher = compileSelections({ shape, polarizations }, selections);
    const marker = new Marker(matcher, shape.subbands * shape.channels * shape.polarizations, axes.offsets);
    const gatherer = new Gatherer(map, axes, { antennaOf, fieldOf, onlyField }, marker, () => marker);
    return new FlagPlacer(gatherer, marker, more);
  }

  /** Tables one after another, each to its end. */
  async *batchesOf(table: Table): AsyncGenerator<PlacedBatch> {
    const columns = [...new Set([...this.#gatherer.columns, ...this.#more])];
    for await (const batch of table.batches(columns)) {
      const taken = this.#marker.begin(batch.rows);
      this.#gatherer.add(batch, table.file);
      yield { batch, length: this.#marker.length, taken };
    }
  }
}

/** Stands where the working copy would: keeps which samples of each row are taken, and looks them up. */
class Marker implements SampleTaker {
  readonly length: number;
  readonly #matcher: SelectionMatcher;
  readonly #rowSamples: number;
  readonly #offsets: Int32Array;
  readonly #block: SampleBlock;
  /** by row of the dataset, the number of its mask */
  #maskOf = new Int32Array(1024);
  #rows = 0;
  readonly #masks: Uint8Array[] = [];
  readonly #maskNumbers = new Map<string, number>();
  #taken = new Uint8Array(0);

  constructor(matcher: SelectionMatcher, rowSamples: number, offsets: Int32Array) {
    this.#matcher = matcher;
    this.#rowSamples = rowSamples;
    this.#offsets = offsets;
    this.length = offsets.length;
    this.#block = newBlock(1, { subbands: 1, channels: 1, polarizations: 1 }, "rows");
  }

  begin(rows: number): Uint8Array {
    this.#taken = new Uint8Array(rows * this.length);
    return this.#taken;
  }

  addRow({ time, antenna1, antenna2, field }: Readonly<SpoolRow>): number {
    const block = this.#block;
    block.time[0] = time;
    block.antenna1[0] = antenna1;
    block.antenna2[0] = antenna2;
    block.field[0] = field;
    if (this.#rows === this.#maskOf.length) {
      const grown = new Int32Array(2 * this.#rows);
      grown.set(this.#maskOf);
      this.#maskOf = grown;
    }
    this.#maskOf[this.#rows] = this.#maskNumber(this.#matcher.matchRow(block, 0));
    this.#rows += 1;
    return this.#rows - 1;
  }

  take(): void {}

  put(at: number, row: number, first: number): void {
    const mask = this.#masks[this.#maskOf[row]!]!;
    for (let i = 0; i < this.length; i++)
      this.#taken[at * this.length + i] = mask[first + this.#offsets[i]!]!;
  }

  /** Rows that the same selections take are alike; there are few kinds of them. */
  #maskNumber(count: number): number {
    const { matched, runs } = this.#matcher;
    const key = matched.subarray(0, count).join(",");
    const known = this.#maskNumbers.get(key);
    if (known !== undefined) return known;
    const mask = new Uint8Array(this.#rowSamples);
    for (let k = 0; k < count; k++) {
      const bounds = runs[matched[k]!]!;
      for (let b = 0; b < bounds.length; b += 2) mask.fill(1, bounds[b], bounds[b + 1]);
    }
    this.#maskNumbers.set(key, this.#masks.length);
    this.#masks.push(mask);
    return this.#masks.length - 1;
  }
}
