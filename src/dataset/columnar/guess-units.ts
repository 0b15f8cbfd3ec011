/** Units that neither the map nor a column's name gives, guessed from some of its values where only one is possible. */
import { InputError } from "../../util/errors.ts";
import type { ColumnUse, ColumnUses, Role } from "./column-map.ts";
import type { ColumnKind } from "./table.ts";
import { unitsOf } from "./units.ts";

/** Finite numbers among the first values of a column. */
export type Peek = (column: string) => readonly number[];

const TIME_RANGES: readonly (readonly [unit: string, low: number, high: number])[] = [
  ["mjd", 30_000, 90_000],
  ["jd", 2_430_000, 2_490_000],
  ["unix", 1e8, 4.2e9],
  ["mjd_seconds", 4.3e9, 7e9],
  ["unix_ms", 1e11, 4e12],
];
/** Light travel of the Earth's diameter is 0.043 s: u, v, w below this are seconds, for metres would be a thumb's width. */
const MOST_SECONDS = 0.03;

/**
 * The uses with every unit filled in.
 *
 * @throws InputError where a unit cannot be told
 */
export function withUnits(
  uses: ColumnUses,
  kinds: ReadonlyMap<string, ColumnKind>,
  peek: Peek,
  file: string,
): ColumnUses {
  const filled: Partial<Record<Role, ColumnUse>> = {};
  for (const [role, use] of Object.entries(uses) as [Role, ColumnUse][]) {
    const known = unitsOf(role);
    if (known.length === 0 || use.unit !== undefined) {
      filled[role] = use;
      continue;
    }
    const unit = guess(role, use, kinds.get(use.column)!, peek, uses);
    if (unit === undefined) {
      throw new InputError(
        `column "${use.column}" (${role}) has no unit: its name and its values leave it open`,
        { file },
        `Say it in a column map: columns: { ${role}: { column: ${use.column}, unit: UNIT } } with one of ${known.join(", ")}`,
      );
    }
    filled[role] = { ...use, unit };
  }
  return filled;
}

function guess(
  role: Role,
  { column }: ColumnUse,
  kind: ColumnKind,
  peek: Peek,
  uses: ColumnUses,
): string | undefined {
  switch (role) {
    case "time":
      return guessTime(kind, peek(column));
    case "u":
    case "v":
    case "w": {
      const values = [uses.u, uses.v, uses.w].flatMap((use) => (use === undefined ? [] : peek(use.column)));
      return values.length > 0 && largest(values) > 0 && largest(values) < MOST_SECONDS ? "s" : undefined;
    }
    case "frequency":
      return guessFrequency(peek(column));
    case "integration":
      return "s";
    case "phase":
      return largest(peek(column)) > 2 * Math.PI ? "deg" : "rad";
    default:
      return undefined;
  }
}

function guessTime(kind: ColumnKind, values: readonly number[]): string | undefined {
  if (kind === "timestamp") return "unix";
  if (values.length === 0) return kind === "text" ? "iso" : undefined;
  const fitting = TIME_RANGES.filter(([, low, high]) =>
    values.every((value) => value >= low && value <= high),
  );
  return fitting.length === 1 ? fitting[0]![0] : undefined;
}

/** Hz from 1 MHz on, GHz below 10; between 10 and 1000 it might be MHz or GHz. */
function guessFrequency(values: readonly number[]): string | undefined {
  if (values.length === 0 || values.some((value) => !(value > 0))) return undefined;
  const most = largest(values);
  if (values.every((value) => value >= 1e6)) return "Hz";
  if (most < 10) return "GHz";
  return values.every((value) => value > 1000) && most < 1e6 ? "MHz" : undefined;
}

function largest(values: readonly number[]): number {
  return values.reduce((most, value) => Math.max(most, Math.abs(value)), 0);
}
