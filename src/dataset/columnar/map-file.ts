/** columns.yaml: what the columns of a table are, checked; what is wrong is refused with its line and column. */
import { dirname, isAbsolute, join } from "node:path";
import { type Document, isMap, isNode, LineCounter, parseDocument } from "yaml";
import type { z } from "zod";
import { InputError, nearest, type Place } from "../../util/errors.ts";
import { readSmallText } from "../../util/small-text.ts";
import { AXES, type ColumnMap, ROLES } from "./column-map.ts";
import { mapSchema } from "./map-schema.ts";

/** A map as it was written: what it leaves out is guessed. */
export interface WrittenMap {
  readonly uses: ColumnMap["uses"];
  /** undefined: the columns tell */
  readonly lists: ColumnMap["lists"] | undefined;
  readonly constants: ColumnMap["constants"];
  /** where it stands, for messages and `describe` */
  readonly from: string;
}

/** @throws InputError when it cannot be read or is not a column map */
export async function readColumnMap(path: string): Promise<WrittenMap> {
  return parseColumnMap(await readSmallText(path, "column map"), path, dirname(path));
}

/**
 * @param file name to put in errors
 * @param folder that paths in the map start from
 * @throws InputError with line and column
 */
export function parseColumnMap(text: string, file: string, folder: string): WrittenMap {
  const lines = new LineCounter();
  const document = parseDocument(text, { lineCounter: lines, prettyErrors: false, merge: false });
  const place = (offset: number | undefined): Place => {
    if (offset === undefined) return { file };
    const { line, col } = lines.linePos(offset);
    return { file, line, column: col };
  };
  const broken = document.errors[0];
  if (broken !== undefined) {
    throw new InputError(`this is not YAML: ${broken.message}`, place(broken.pos[0]));
  }
  const checked = mapSchema.safeParse(plainOf(document, file) ?? {});
  if (!checked.success) {
    const issue = deepest(checked.error.issues[0]!);
    throw new InputError(messageOf(issue), place(offsetOf(document, issue.path)));
  }
  const { columns, lists, constants = {} } = checked.data;
  const uses = Object.fromEntries(Object.entries(columns).filter(([, use]) => use !== undefined));
  const { antennaFile } = constants;
  return {
    uses,
    lists,
    constants:
      antennaFile === undefined || isAbsolute(antennaFile)
        ? constants
        : { ...constants, antennaFile: join(folder, antennaFile) },
    from: file,
  };
}

function plainOf(document: Document.Parsed, file: string): unknown {
  try {
    // A few aliases may stand for others a thousand times over: that is no column map.
    return document.toJS({ maxAliasCount: 100 });
  } catch (cause) {
    throw new InputError("the column map refers to itself too often", { file }, undefined, { cause });
  }
}

/** Of a choice of forms, the complaint of the form that came nearest. */
function deepest(issue: z.core.$ZodIssue): z.core.$ZodIssue {
  if (issue.code !== "invalid_union") return issue;
  let best: z.core.$ZodIssue = issue;
  for (const inner of issue.errors.flat()) {
    const found = deepest(inner);
    if (nearness(found) > nearness(best)) best = { ...found, path: [...issue.path, ...found.path] };
  }
  return best;
}

/** A form that was met but for something inside it says more than the list of forms. */
function nearness(issue: z.core.$ZodIssue): number {
  if (issue.code === "custom") return 3;
  if (issue.code === "unrecognized_keys") return 2;
  return issue.code !== "invalid_union" && issue.path.length > 0 ? 1 : 0;
}

const KEYS: readonly string[] = [
  ...ROLES,
  ...AXES,
  ...["columns", "lists", "constants", "column", "unit", "since", "from", "precision"],
  ...[
    "array",
    "polarizations",
    "frequencies",
    "channel_width",
    "setups",
    "reference_frequency",
    "integration",
  ],
  ...["fields", "antennas", "antenna_positions", "dish_diameter", "frame", "reference_date", "sidereal_time"],
  ...["id", "name", "ra", "dec", "equinox", "number", "position", "diameter", "start", "step", "channels"],
];

function messageOf(issue: z.core.$ZodIssue): string {
  const at = issue.path.length === 0 ? "" : `${issue.path.join(".")}: `;
  if (issue.code === "unrecognized_keys") {
    const word = issue.keys[0]!;
    const near = nearest(word, KEYS);
    return `${at}unknown key "${word}"${near === undefined ? "" : `: did you mean "${near}"?`}`;
  }
  return `${at}${issue.message}`;
}

/** Where the node stands that the path leads to, or the nearest one above it that is there. */
function offsetOf(document: Document.Parsed, path: readonly PropertyKey[]): number | undefined {
  for (let length = path.length; length >= 0; length--) {
    const node = document.getIn(path.slice(0, length), true);
    if (isNode(node) && node.range) return node.range[0];
    if (length === 0 && isMap(document.contents)) return document.contents.range?.[0];
  }
  return undefined;
}
