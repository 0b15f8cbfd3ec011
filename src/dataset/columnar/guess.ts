/**
 * What columns are, guessed from the names that people give them. A guess is always shown; what could be two things is
 * asked for and not guessed.
 */
import { InputError } from "../../util/errors.ts";
import { type ColumnUse, type ColumnUses, ROLES, type Role, SAMPLE_ROLES } from "./column-map.ts";
import type { TableColumn } from "./table.ts";

/** Plain words for a role, without case, blanks, underscores and units. */
const WORDS: Readonly<Record<Role, readonly string[]>> = {
  time: [
    ...[
      "time",
      "mjd",
      "jd",
      "timemjd",
      "mjdtime",
      "timejd",
      "mjdutc",
      "utc",
      "timeutc",
      "utctime",
      "timestamp",
    ],
    ...["datetime", "juliandate", "julianday", "unixtime", "unix", "timeunix", "epochtime", "timecentroid"],
  ],
  antenna1: ["antenna1", "ant1", "a1", "station1", "stat1", "dish1", "telescope1", "antennaa", "anta"],
  antenna2: ["antenna2", "ant2", "a2", "station2", "stat2", "dish2", "telescope2", "antennab", "antb"],
  u: ["u", "uu", "ucoord", "uvwu"],
  v: ["v", "vv", "vcoord", "uvwv"],
  w: ["w", "ww", "wcoord", "uvww"],
  subband: ["subband", "subbandid", "sb", "if", "ifnumber", "band", "bandid", "spectralwindow", "spw"],
  channel: ["channel", "chan", "ch", "channelnumber", "channelindex", "channumber", "chanindex", "channelid"],
  frequency: ["frequency", "freq", "nu", "skyfrequency", "channelfrequency", "chanfreq", "freqcentre"],
  polarization: ["polarization", "polarisation", "pol", "stokes", "product", "correlation", "corr", "hand"],
  field: ["field", "fieldid", "fieldname", "source", "sourceid", "sourcename", "target", "object"],
  setup: ["setup", "setupid", "freqid", "freqsel", "frqsel", "frequencysetup", "freqsetup"],
  subarray: ["subarray", "subarrayid"],
  integration: [
    ...["integration", "integrationtime", "inttim", "inttime", "exposure", "interval", "tint", "dwell"],
  ],
  real: ["real", "re", "visreal", "visre", "realpart", "datareal", "datare", "visibilityreal"],
  imag: ["imag", "im", "imaginary", "visimag", "visim", "imagpart", "dataimag", "dataim", "visibilityimag"],
  amplitude: ["amplitude", "amp", "visamp", "visamplitude", "ampl"],
  phase: ["phase", "visphase", "phs"],
  weight: ["weight", "weights", "wt", "wgt"],
  sigma: ["sigma", "rms", "noise", "stddev", "uncertainty", "sigmavis"],
  flag: ["flag", "flags", "flagged", "isflagged", "mask", "masked"],
};

/** Endings of a name that are a unit of the role. */
const ENDINGS: Readonly<Partial<Record<Role, Readonly<Record<string, string>>>>> = {
  time: { mjd: "mjd", jd: "jd", unix: "unix", iso: "iso" },
  u: {},
  frequency: { hz: "Hz", khz: "kHz", mhz: "MHz", ghz: "GHz" },
  phase: { deg: "deg", degrees: "deg", rad: "rad", radians: "rad" },
  integration: { s: "s", sec: "s", seconds: "s", ms: "ms", min: "min" },
};
const UVW_ENDINGS: Readonly<Record<string, string>> = {
  s: "s",
  sec: "s",
  seconds: "s",
  us: "us",
  ns: "ns",
  nsec: "ns",
  nanoseconds: "ns",
  m: "m",
  metre: "m",
  metres: "m",
  meters: "m",
  km: "km",
  lambda: "wavelengths",
  wavelengths: "wavelengths",
  wl: "wavelengths",
  klambda: "kilowavelengths",
  kilowavelengths: "kilowavelengths",
  mlambda: "megawavelengths",
};

function endingsOf(role: Role): Readonly<Record<string, string>> {
  return role === "u" || role === "v" || role === "w" ? UVW_ENDINGS : (ENDINGS[role] ?? {});
}

/** Lower case; words joined. */
function bare(name: string): string {
  return name.toLowerCase().replace(/[^a-z0-9]/g, "");
}

/** How a column's name fits a role: null not at all, else the unit its ending names. */
function fit(name: string, role: Role): { unit: string | undefined } | null {
  if (WORDS[role].includes(bare(name))) {
    // "mjd" is both the word for the time and its unit.
    return { unit: role === "time" ? timeUnitIn(bare(name)) : undefined };
  }
  const match = /^(.*[^_\s[(])[_\s[(]+([a-z]+)[\])]?$/i.exec(name.trim());
  if (match === null) return null;
  const unit = endingsOf(role)[match[2]!.toLowerCase()];
  return unit !== undefined && WORDS[role].includes(bare(match[1]!)) ? { unit } : null;
}

function timeUnitIn(word: string): string | undefined {
  if (word.includes("mjd")) return "mjd";
  if (word.includes("jd") || word.startsWith("julian")) return "jd";
  return word.includes("unix") ? "unix" : undefined;
}

/**
 * The columns that can be told by their names.
 *
 * @throws InputError where two columns would have the same role
 */
export function guessUses(columns: readonly TableColumn[], file: string): ColumnUses {
  const uses: Partial<Record<Role, ColumnUse>> = {};
  for (const role of ROLES) {
    const found = columns.flatMap(({ name, kind }) => {
      const fitted = kind === "other" ? null : fit(name, role);
      return fitted === null ? [] : [{ column: name, ...(fitted.unit === undefined ? {} : fitted) }];
    });
    const [first, second] = found;
    if (first === undefined) continue;
    if (second !== undefined) {
      throw new InputError(
        `${found.map(({ column }) => `"${column}"`).join(" and ")} might each be the ${role}`,
        { file },
        `Say which in a column map: columns: { ${role}: ${first.column} } and so on for the others`,
      );
    }
    uses[role] = first as ColumnUse;
  }
  // Of two ways to say a value, the one that is whole.
  if (uses.real !== undefined && uses.imag !== undefined) {
    uses.amplitude = undefined as never;
    uses.phase = undefined as never;
  }
  return Object.fromEntries(Object.entries(uses).filter(([, use]) => use !== undefined));
}

/** Refuse a table that lacks what every dataset needs. @throws InputError that names the columns there are */
export function requireUses(uses: ColumnUses, columns: readonly TableColumn[], file: string): void {
  const missing: string[] = (["time", "antenna1", "antenna2", "u", "v", "w"] as const).filter(
    (role) => uses[role] === undefined,
  );
  const whole = uses.real !== undefined && uses.imag !== undefined;
  const polar = uses.amplitude !== undefined && uses.phase !== undefined;
  if (!whole && !polar) missing.push("real and imag (or amplitude and phase)");
  if (missing.length > 0) {
    const taken = new Set(Object.values(uses).map(({ column }) => column));
    const left = columns.filter(({ name }) => !taken.has(name)).map(({ name }) => `"${name}"`);
    const candidates =
      left.length === 0 ? "no column is left" : `columns not yet used: ${left.slice(0, 20).join(", ")}`;
    throw new InputError(
      `no column is known to hold ${missing.join(", ")}; ${candidates}`,
      { file },
      "Say which column holds what in a column map, a YAML file: columns: { time: NAME, ... }",
    );
  }
  requireColumns(uses, columns, file);
}

function requireColumns(uses: ColumnUses, columns: readonly TableColumn[], file: string): void {
  const names = new Map(columns.map((column) => [column.name, column]));
  const lists: string[] = [];
  const singles: string[] = [];
  for (const [role, { column }] of Object.entries(uses)) {
    const found = names.get(column);
    if (found === undefined) {
      const there = columns.slice(0, 20).map(({ name }) => `"${name}"`);
      throw new InputError(
        `there is no column "${column}", which the column map calls ${role}; there are ${there.join(", ")}`,
        { file },
      );
    }
    if (found.kind === "other") {
      throw new InputError(`column "${column}" holds neither numbers, text nor lists of them`, { file });
    }
    const isSample = SAMPLE_ROLES.includes(role as Role);
    if (found.kind === "list" && !isSample && role !== "frequency") {
      throw new InputError(`column "${column}" holds lists: expected one ${role} a row`, { file });
    }
    if (isSample) (found.kind === "list" ? lists : singles).push(column);
  }
  // A flag, weight or sigma of a whole row goes with lists of values.
  const values = [uses.real, uses.imag, uses.amplitude, uses.phase].flatMap((use) => use?.column ?? []);
  if (lists.length > 0 && values.some((column) => singles.includes(column))) {
    throw new InputError(
      `"${lists[0]}" holds lists and "${values.find((column) => singles.includes(column))}" does not: expected both alike`,
      { file },
    );
  }
}
