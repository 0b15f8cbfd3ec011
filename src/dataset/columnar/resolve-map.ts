/** Which column map is in force: one that is named, one beside the files, one that a file carries, or a guess. */
import { stat } from "node:fs/promises";
import { basename, dirname, join } from "node:path";
import { InputError } from "../../util/errors.ts";
import { datasetName } from "../name.ts";
import type { Notes } from "../notes.ts";
import { axesWithoutColumn } from "./axes.ts";
import { numberIn } from "./cells.ts";
import { type ColumnMap, type ColumnUses, ROLES, SAMPLE_ROLES } from "./column-map.ts";
import { guessUses, requireUses } from "./guess.ts";
import { type Peek, withUnits } from "./guess-units.ts";
import { parseColumnMap, readColumnMap, type WrittenMap } from "./map-file.ts";
import { type Batch, rowPlace, type Table, type TableColumn } from "./table.ts";

/** Name of a map that holds for a whole folder. */
const FOLDER_MAP = "columns.yaml";
/** Values of a column that are looked at to guess its unit. */
const MOST_PEEKED = 2000;

/**
 * The map beside the files or in the first of them: `<file>.columns.yaml`, the file's own metadata,
 * `<dataset>.columns.yaml`, `columns.yaml` in the folder, in this order.
 *
 * @param named path that the user gave; it goes before all
 */
export async function findMap(named: string | undefined, table: Table): Promise<WrittenMap | undefined> {
  if (named !== undefined) return readColumnMap(named);
  const folder = dirname(table.file);
  const own = `${table.file}.columns.yaml`;
  if (await isFile(own)) return readColumnMap(own);
  if (table.mapText !== undefined) {
    return parseColumnMap(table.mapText, `${table.file}, column map in its metadata`, folder);
  }
  for (const beside of [join(folder, `${datasetName(table.file)}.columns.yaml`), join(folder, FOLDER_MAP)]) {
    if (await isFile(beside)) return readColumnMap(beside);
  }
  return undefined;
}

async function isFile(path: string): Promise<boolean> {
  const status = await stat(path).catch(() => undefined);
  return status?.isFile() ?? false;
}

/**
 * The map with everything filled in that can be told from the columns' names and values; what was guessed is noted.
 *
 * @throws InputError where something is missing that cannot be guessed
 */
export async function completeMap(
  written: WrittenMap | undefined,
  table: Table,
  notes: Notes,
): Promise<ColumnMap> {
  const { file, columns } = table;
  const named = written !== undefined && Object.keys(written.uses).length > 0;
  const uses = named ? written.uses : guessUses(columns, file);
  requireUses(uses, columns, file);
  const kinds = new Map(columns.map(({ name, kind }) => [name, kind]));
  const peeked = await peek(table, uses);
  const full = withUnits(uses, kinds, peeked, file);
  const holdsLists = (role: (typeof ROLES)[number]) => {
    const use = full[role];
    return use !== undefined && kinds.get(use.column) === "list";
  };
  const lists = SAMPLE_ROLES.some(holdsLists);
  const map: ColumnMap = { uses: full, lists: [], constants: written?.constants ?? {} };
  const axes = lists ? (written?.lists ?? axesWithoutColumn(map, holdsLists("frequency"))) : [];
  const doubled = axes.find((axis) => !axesWithoutColumn(map, holdsLists("frequency")).includes(axis));
  if (doubled !== undefined) {
    throw new InputError(
      `the lists run along ${axes.join(" x ")}, and ${doubled} has a column of its own too: expected one of them`,
      { file },
      "Take it out of lists, or out of columns",
    );
  }
  if (!named) noteGuess(full, axes, file, notes);
  else noteUnits(written, full, notes);
  return { ...map, lists: axes };
}

function noteGuess(uses: ColumnUses, lists: readonly string[], file: string, notes: Notes): void {
  const parts = ROLES.flatMap((role) => {
    const use = uses[role];
    if (use === undefined) return [];
    return [`${role} is "${use.column}"${use.unit === undefined ? "" : ` in ${use.unit}`}`];
  });
  const along = lists.length === 0 ? "" : `; lists run along ${lists.join(" x ")}, the last fastest`;
  notes.note(
    "columns-guessed",
    `what the columns of ${basename(file)} hold was guessed from their names: ${parts.join(", ")}${along}. ` +
      "describe --column-map FILE saves this for you to correct",
  );
}

function noteUnits(written: WrittenMap, full: ColumnUses, notes: Notes): void {
  const guessed = ROLES.filter(
    (role) => full[role]?.unit !== undefined && written.uses[role]?.unit === undefined,
  );
  if (guessed.length === 0) return;
  const parts = guessed.map((role) => `${role} in ${full[role]!.unit}`);
  notes.note("units-guessed", `units that the column map leaves out were guessed: ${parts.join(", ")}`);
}

/** Finite numbers at the head of the columns whose unit may have to be guessed. */
async function peek(table: Table, uses: ColumnUses): Promise<Peek> {
  const wanted = (["time", "u", "v", "w", "frequency", "phase"] as const).flatMap((role) => {
    const use = uses[role];
    return use === undefined || use.unit !== undefined ? [] : [use.column];
  });
  if (wanted.length === 0) return () => [];
  for await (const batch of table.batches(wanted)) {
    const heads = new Map(wanted.map((column) => [column, numbersOf(batch, column, table)]));
    return (column) => heads.get(column) ?? [];
  }
  return () => [];
}

function numbersOf(batch: Batch, column: string, table: Table): number[] {
  const kind = table.columns.find(({ name }: TableColumn) => name === column)!.kind;
  if (kind === "text") return [];
  const cells = batch.column(column);
  const numbers: number[] = [];
  for (let row = 0; row < batch.rows && numbers.length < MOST_PEEKED; row++) {
    const cell = cells[row];
    const elements = typeof cell === "object" && cell !== null ? (cell as ArrayLike<unknown>) : [cell];
    for (let i = 0; i < elements.length; i++) {
      if (typeof elements[i] === "string" && String(elements[i]).startsWith("[")) continue;
      const value = numberIn(elements[i], column, () => rowPlace(table.file, batch, row));
      if (Number.isFinite(value)) numbers.push(value);
    }
  }
  return numbers;
}
