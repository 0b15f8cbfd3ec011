/** Reads flags.json as a stranger's text. Its writer and published schema are the report's. */
import { readFile, stat } from "node:fs/promises";
import * as z from "zod";
import { POLARIZATIONS } from "../dataset/dataset.ts";
import { InputError, nearest, type Place } from "../util/errors.ts";
import type { FlagCost, FlagEntry, FlagFile } from "./entry.ts";

const LARGEST_FILE = 256 * 1024 * 1024;
const MOST_ENTRIES = 100_000;
const MOST_MEMBERS = 100_000;

const index = z.int().min(0).max(0x7fffffff);
const number = z.int().min(-0x80000000).max(0x7fffffff);
const pairOf = (member: typeof index) => z.tuple([member, member]);
const listOf = <T extends z.ZodType>(member: T) => z.array(member).max(MOST_MEMBERS).nullable();
/** JSON has no NaN: what was not computed is null. */
const known = z
  .number()
  .nullable()
  .transform((value) => value ?? Number.NaN);

const ENTRY = z.object({
  id: z.string().min(1).max(60),
  rule: z.string().max(60),
  reason: z.string().max(10_000),
  antennas: listOf(number),
  baselines: listOf(pairOf(number)),
  time: z.tuple([z.number(), z.number()]).nullable(),
  subbands: listOf(index),
  channels: listOf(pairOf(index)),
  polarizations: listOf(z.enum(POLARIZATIONS)),
  fields: listOf(number),
  samples: z.int().min(0),
  fraction: known,
  confidence: known,
  cost: z.object({
    sensitivityLossFraction: known,
    beamMajorChangeFraction: known,
    beamMinorChangeFraction: known,
    peakSidelobeChangeFraction: known,
    largestGapChangeFraction: known,
  } satisfies Record<keyof FlagCost, unknown>),
} satisfies Record<keyof FlagEntry, unknown>);

/** Keys that a later minor version adds are let pass. */
const FLAG_FILE = z.object({
  format: z.literal("visvet-flags"),
  version: z.literal(1),
  dataset: z.string().max(10_000),
  entries: z.array(ENTRY).max(MOST_ENTRIES),
});

/** @throws InputError when the file is not there, not JSON, or not of this form; it says which entry and key */
export async function readFlagFile(path: string): Promise<FlagFile> {
  let size: number;
  try {
    size = (await stat(path)).size;
  } catch (error) {
    throw new InputError("no such file of flags", { file: path }, "Check the path", { cause: error });
  }
  if (size > LARGEST_FILE) {
    const found = `${size} bytes: at most ${LARGEST_FILE}`;
    throw new InputError(found, { file: path }, "Say the same with fewer, larger entries");
  }
  return parseFlagFile(await readFile(path, "utf8"), path);
}

/** @param path as the user gave it, for errors */
export function parseFlagFile(text: string, path: string): FlagFile {
  let value: unknown;
  try {
    value = JSON.parse(text);
  } catch (error) {
    const why = error instanceof Error ? error.message : String(error);
    throw new InputError(`not JSON: ${why}`, { file: path }, "visvet check writes flags.json", {
      cause: error,
    });
  }
  requireOurs(value, path);
  const read = FLAG_FILE.safeParse(value);
  if (!read.success) throw formError(value, read.error.issues[0]!, path);
  for (const [i, entry] of read.data.entries.entries()) requireOrder(entry, i, path);
  return read.data;
}

function requireOurs(value: unknown, path: string): void {
  if (property(value, "format") !== "visvet-flags") {
    const found = 'not a file of flags: its format is not "visvet-flags"';
    throw new InputError(found, { file: path }, "Give the flags.json that visvet check wrote");
  }
  const version = property(value, "version");
  if (version !== 1) {
    const found = `flags of version ${JSON.stringify(version)}: expected 1`;
    throw new InputError(found, { file: path }, "Use the visvet that wrote it");
  }
}

/** A range that ends before it begins selects nothing, which nobody means. */
function requireOrder(entry: FlagEntry, at: number, path: string): void {
  const wrong = (key: string, low: number, high: number) =>
    new InputError(
      `${key} from ${low} to ${high}`,
      { file: path, part: `entry ${at + 1} (${entry.id})` },
      "The first may not exceed the second",
    );
  if (entry.time !== null && entry.time[0] > entry.time[1]) throw wrong("time", ...entry.time);
  for (const [low, high] of entry.channels ?? []) {
    if (low > high) throw wrong("channels", low, high);
  }
}

function formError(value: unknown, issue: z.core.$ZodIssue, path: string): InputError {
  const [first, at, ...rest] = issue.path;
  const entry =
    first === "entries" && typeof at === "number" ? property(property(value, "entries"), at) : undefined;
  const keys = (entry === undefined ? issue.path : rest).map(String);
  const id = property(entry, "id");
  const name = typeof id === "string" ? ` (${id})` : "";
  const place: Place = {
    file: path,
    ...(entry === undefined ? {} : { part: `entry ${Number(at) + 1}${name}` }),
  };
  const holder = entry ?? value;
  const [key] = keys;
  if (key !== undefined && typeof holder === "object" && property(holder, key) === undefined) {
    // A missing part would select everything: that has to be said, as null.
    const near = nearest(key, Object.keys(holder ?? {}));
    const advice = near === undefined ? "Every key is there, null for all" : `Is "${near}" meant for it?`;
    return new InputError(`${key} is missing`, place, advice);
  }
  return new InputError(`${keys.length === 0 ? "the entry" : keys.join(".")}: ${issue.message}`, place);
}

function property(value: unknown, key: PropertyKey): unknown {
  if (typeof value !== "object" || value === null || !Object.hasOwn(value, key)) return undefined;
  return (value as Record<PropertyKey, unknown>)[key];
}
