/** The second reading of the tables: every cell into its row and sample of the working copy. */
import { InputError, type Place } from "../../util/errors.ts";
import type { ResolvedAxes } from "./axes.ts";
import { isNothing, numberIn, type Where } from "./cells.ts";
import type { ColumnMap, ColumnUse, ColumnUses, Role } from "./column-map.ts";
import { Coding, type Label } from "./labels.ts";
import { RowIndex } from "./row-index.ts";
import { SampleReader } from "./sample-reader.ts";
import type { SpoolRow, SpoolWriter } from "./spool-writer.ts";
import { type Batch, rowPlace, type Table } from "./table.ts";
import { isWavelengths, mjdFromIso, toMjd, toSi } from "./units.ts";

/** Numbers that rows carry for the names in the table. */
export interface RowCodes {
  readonly antennaOf: ReadonlyMap<Label, number>;
  readonly fieldOf: ReadonlyMap<Label, number> | undefined;
  /** of rows where no column says */
  readonly onlyField: number;
}

/** Oddities met on the way, for notes. */
export interface GatherCounts {
  tableRows: number;
  /** samples of which a value or weight is empty */
  empty: number;
  /** samples whose u, v, w are not those of their row's first sample */
  uvwDiffer: number;
}

/** u, v, w of one row's samples agree to single precision, or they are not of one row. */
const UVW_TOLERANCE = 1e-5;

/** @throws InputError at the row where something is wrong */
export async function gatherRows(
  tables: readonly Table[],
  map: ColumnMap,
  axes: ResolvedAxes,
  codes: RowCodes,
  writer: SpoolWriter,
): Promise<GatherCounts> {
  const samples = (counts: GatherCounts) =>
    new SampleReader(map.uses, axes.offsets, map.lists.length > 0, counts, writer);
  const gatherer = new Gatherer(map, axes, codes, writer, samples);
  for (const table of tables) {
    for await (const batch of table.batches(gatherer.columns)) gatherer.add(batch, table.file);
  }
  return gatherer.counts;
}

/** Takes the samples of table rows, once the row and sample that they belong to are known. */
export type SampleTaker = Pick<SampleReader, "take" | "put">;

/** Finds the row and sample that each table row belongs to. */
export class Gatherer {
  readonly columns: readonly string[];
  readonly counts: GatherCounts = { tableRows: 0, empty: 0, uvwDiffer: 0 };
  readonly #uses: ColumnUses;
  readonly #axes: ResolvedAxes;
  readonly #writer: Pick<SpoolWriter, "addRow">;
  readonly #onlyField: number;
  readonly #integration: number;
  /** Hz that u, v, w in wavelengths are of; undefined: of the sample's own channel */
  readonly #reference: number | undefined;
  /** undefined: a table row is a row of the dataset */
  readonly #index: RowIndex | undefined;
  readonly #codings = new Map<Role, Coding>();
  readonly #samples: SampleTaker;
  readonly #toHertz: (value: number) => number;
  readonly #row: SpoolRow = {
    time: 0,
    u: 0,
    v: 0,
    w: 0,
    antenna1: 0,
    antenna2: 0,
    subarray: 1,
    field: 1,
    setup: 0,
    integration: Number.NaN,
  };
  /** of the rows before, one each baseline of late: u, v, w of the first sample */
  readonly #rests = new Map<string, number>();
  #firstUvw: Float64Array = new Float64Array(3);
  #firstRow = -1;

  constructor(
    map: ColumnMap,
    axes: ResolvedAxes,
    codes: RowCodes,
    writer: Pick<SpoolWriter, "addRow">,
    samples: (counts: GatherCounts) => SampleTaker,
  ) {
    const { uses, constants } = map;
    this.#uses = uses;
    this.#axes = axes;
    this.#writer = writer;
    this.#onlyField = codes.onlyField;
    this.#integration = constants.integration ?? Number.NaN;
    this.#reference = constants.referenceFrequency;
    this.columns = Object.values(uses).map(({ column }) => column);
    const coding = (role: Role, labels: ReadonlyMap<Label, number> | undefined) => {
      const use = uses[role];
      if (use !== undefined && labels !== undefined) {
        this.#codings.set(role, new Coding(labels, use.column));
      }
    };
    coding("antenna1", codes.antennaOf);
    coding("antenna2", codes.antennaOf);
    coding("field", codes.fieldOf);
    coding("setup", axes.setupOf);
    coding("subband", axes.subbandOf);
    coding("polarization", axes.polarizationOf);
    if (axes.channelOf?.by === "number") coding("channel", axes.channelOf.codes);
    const spread =
      axes.subbandOf !== undefined || axes.channelOf !== undefined || axes.polarizationOf !== undefined;
    this.#index = spread ? new RowIndex() : undefined;
    this.#toHertz = uses.frequency === undefined ? (value) => value : toSi("frequency", uses.frequency);
    this.#samples = samples(this.counts);
  }

  add(batch: Batch, file: string): void {
    const cells = this.#cellsOf(batch);
    const times = this.#times(cells, batch, file);
    const [u, v, w] = (["u", "v", "w"] as const).map((role) => this.#numbers(role, cells, batch, file));
    const integrations =
      this.#uses.integration === undefined ? undefined : this.#numbers("integration", cells, batch, file);
    this.#samples.take(cells);
    let at = 0;
    const where = () => rowPlace(file, batch, at);
    for (; at < batch.rows; at++) {
      const row = this.#row;
      row.time = times[at]!;
      row.antenna1 = this.#code("antenna1", cells, at, where, 0);
      row.antenna2 = this.#code("antenna2", cells, at, where, 0);
      row.field = this.#code("field", cells, at, where, this.#onlyField);
      row.setup = this.#code("setup", cells, at, where, 0);
      row.subarray = this.#subarray(cells, at, where);
      const subband = this.#code("subband", cells, at, where, 0);
      const channel = this.#channel(cells, at, row.setup, subband, where);
      const { channels, polarizations, subbands } = this.#axes.shape;
      const polarization = this.#code("polarization", cells, at, where, 0);
      const hertz = this.#hertz(row.setup, subband * channels + channel, subbands * channels);
      row.u = this.#seconds("u", u![at]!, hertz);
      row.v = this.#seconds("v", v![at]!, hertz);
      row.w = this.#seconds("w", w![at]!, hertz);
      row.integration = integrations === undefined ? this.#integration : integrations[at]!;
      const target = this.#target(where);
      this.#samples.put(at, target, (subband * channels + channel) * polarizations + polarization, where);
    }
    this.counts.tableRows += batch.rows;
  }

  #cellsOf(batch: Batch): ReadonlyMap<Role, ArrayLike<unknown>> {
    const entries = Object.entries(this.#uses) as [Role, ColumnUse][];
    return new Map(entries.map(([role, { column }]) => [role, batch.column(column)]));
  }

  #numbers(
    role: Role,
    cells: ReadonlyMap<Role, ArrayLike<unknown>>,
    batch: Batch,
    file: string,
  ): Float64Array {
    const use = this.#uses[role]!;
    const column = cells.get(role)!;
    const convert = toSi(role, use);
    let row = 0;
    const where = () => rowPlace(file, batch, row);
    const numbers = new Float64Array(batch.rows);
    for (; row < batch.rows; row++) numbers[row] = convert(numberIn(column[row], use.column, where));
    return numbers;
  }

  #times(cells: ReadonlyMap<Role, ArrayLike<unknown>>, batch: Batch, file: string): Float64Array {
    const use = this.#uses.time!;
    const column = cells.get("time")!;
    const iso = use.unit === "iso";
    const convert = toMjd(use);
    const times = new Float64Array(batch.rows);
    let row = 0;
    const where = () => rowPlace(file, batch, row);
    for (; row < batch.rows; row++) {
      // The rows of an integration carry one time: it is read once.
      if (row > 0 && column[row] === column[row - 1]) times[row] = times[row - 1]!;
      else if (iso) times[row] = isoTime(column[row], use.column, where);
      else times[row] = convert(numberIn(column[row], use.column, where));
    }
    return times;
  }

  #code(
    role: Role,
    cells: ReadonlyMap<Role, ArrayLike<unknown>>,
    at: number,
    where: Where,
    otherwise: number,
  ): number {
    const coding = this.#codings.get(role);
    return coding === undefined ? otherwise : coding.code(cells.get(role)![at], where);
  }

  #subarray(cells: ReadonlyMap<Role, ArrayLike<unknown>>, at: number, where: Where): number {
    const use = this.#uses.subarray;
    if (use === undefined) return 1;
    const number = numberIn(cells.get("subarray")![at], use.column, where);
    if (Number.isInteger(number) && number >= 0 && number <= 9999) return number;
    throw new InputError(`the sub-array is ${number}: expected a whole number up to 9999`, where());
  }

  #channel(
    cells: ReadonlyMap<Role, ArrayLike<unknown>>,
    at: number,
    setup: number,
    subband: number,
    where: Where,
  ): number {
    const { channelOf, shape } = this.#axes;
    if (channelOf === undefined) return 0;
    if (channelOf.by === "number") return this.#code("channel", cells, at, where, 0);
    const use = this.#uses.frequency!;
    const hertz = this.#toHertz(numberIn(cells.get("frequency")![at], use.column, where));
    const channel = channelOf.codes[setup * shape.subbands + subband]?.get(hertz);
    if (channel !== undefined) return channel;
    throw new InputError(`no channel is at ${hertz} Hz`, where(), "The file is being written: wait");
  }

  #hertz(setup: number, channel: number, channels: number): number {
    if (this.#reference !== undefined) return this.#reference;
    const { frequencies } = this.#axes.setups[setup]!;
    return frequencies[Math.min(channel, channels - 1)]!;
  }

  #seconds(role: "u" | "v" | "w", value: number, hertz: number): number {
    return isWavelengths(this.#uses[role]!.unit) ? value / hertz : value;
  }

  /** The row of the working copy that this table row belongs to. */
  #target(where: () => Place): number {
    const row = this.#row;
    if (this.#index === undefined) return this.#writer.addRow(row);
    const rest = this.#rest(row);
    const found = this.#index.find(
      { time: row.time, antenna1: row.antenna1, antenna2: row.antenna2, rest },
      where,
    );
    if (found >= 0) {
      if (found === this.#firstRow) this.#compareUvw(row);
      return found;
    }
    this.#firstRow = this.#writer.addRow(row);
    this.#firstUvw = Float64Array.of(row.u, row.v, row.w);
    return this.#firstRow;
  }

  #rest({ field, setup, subarray }: SpoolRow): number {
    const { field: fields, setup: setups, subarray: subarrays } = this.#uses;
    if (fields === undefined && setups === undefined && subarrays === undefined) return 0;
    const key = `${field}|${setup}|${subarray}`;
    const known = this.#rests.get(key);
    if (known !== undefined) return known;
    const rest = this.#rests.size;
    this.#rests.set(key, rest);
    return rest;
  }

  #compareUvw({ u, v, w }: SpoolRow): void {
    const [u0, v0, w0] = this.#firstUvw as unknown as [number, number, number];
    const size = Math.abs(u0) + Math.abs(v0) + Math.abs(w0);
    const apart = Math.abs(u - u0) + Math.abs(v - v0) + Math.abs(w - w0);
    if (apart > UVW_TOLERANCE * size) this.counts.uvwDiffer += 1;
  }
}

function isoTime(cell: unknown, column: string, where: Where): number {
  if (isNothing(cell)) return Number.NaN;
  const mjd = mjdFromIso(String(cell));
  if (!Number.isNaN(mjd)) return mjd;
  throw new InputError(
    `"${String(cell).slice(0, 40)}" in column "${column}" is no date`,
    where(),
    "Dates are written as 2026-04-17T10:00:30.5",
  );
}
