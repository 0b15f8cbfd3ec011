/** The form of columns.yaml: what each key may hold, and from what is written to SI units. */
import { z } from "zod";
import { mjdFromDate } from "../../util/dates.ts";
import { InputError, nearest } from "../../util/errors.ts";
import { parseDuration, parseFrequency, parseLength } from "../../util/units.ts";
import { POLARIZATIONS, type Polarization } from "../dataset.ts";
import { AXES, type ColumnUse, type Constants, ROLES, type Role, type SetupConstant } from "./column-map.ts";
import { parseDeclination, parseRightAscension } from "./sky-angles.ts";
import { needsEpoch, unitsOf } from "./units.ts";

/** Channels in all setups. */
const MOST_FREQUENCIES = 1 << 24;

/** A number in SI, or text with a unit. */
function quantity(parse: (text: string) => number, what: string) {
  return z.union([z.number(), z.string()], { error: `expected ${what}` }).transform((value, context) => {
    if (typeof value === "number") {
      if (Number.isFinite(value)) return value;
      context.addIssue({ code: "custom", message: `expected ${what}` });
      return z.NEVER;
    }
    try {
      return parse(value);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      context.addIssue({ code: "custom", message: error.message });
      return z.NEVER;
    }
  });
}

const frequency = quantity(parseFrequency, 'a frequency, such as "1.4GHz"');
const duration = quantity(parseDuration, 'a duration, such as "10s"');
const length = quantity(parseLength, 'a length, such as "25m"');
const text = z.union([z.string(), z.number().transform(String)]);

/** Text alone: a number of no unit might be hours or degrees. */
function angleText(parse: (value: string) => number, example: string) {
  return z.string({ error: `expected an angle, such as "${example}"` }).transform((value, context) => {
    try {
      return parse(value);
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      context.addIssue({ code: "custom", message: error.message });
      return z.NEVER;
    }
  });
}

const date = z.string({ error: 'expected a date, such as "2026-04-17"' }).transform((value, context) => {
  const mjd = mjdFromDate(value);
  if (!Number.isNaN(mjd)) return mjd;
  context.addIssue({ code: "custom", message: `"${value}" is no date: expected one such as 2026-04-17` });
  return z.NEVER;
});
const epoch = z.union([z.number(), date], { error: "expected an MJD, or a date such as 2026-04-17" });

const fullUse = z.strictObject({
  column: text,
  unit: z.string().optional(),
  since: epoch.optional(),
  from: z.int().min(0).optional(),
  precision: z.enum(["single", "double"], { error: "expected single or double" }).optional(),
});

function use(role: Role) {
  return z
    .union([text, fullUse], { error: "expected the name of a column, or { column: NAME, unit: UNIT }" })
    .transform((value, context): ColumnUse => {
      const { column, unit, since, from, precision } =
        typeof value === "string" ? ({ column: value } as z.infer<typeof fullUse>) : value;
      const known = unitsOf(role);
      if (unit !== undefined && !known.includes(unit)) {
        const near = nearest(unit, known);
        const hint = near === undefined ? known.join(", ") || "none" : `did you mean "${near}"?`;
        context.addIssue({ code: "custom", message: `unknown unit "${unit}" of ${role}: ${hint}` });
      }
      if (role === "time" && needsEpoch(unit) && since === undefined) {
        context.addIssue({ code: "custom", message: `a time in ${unit} needs "since", an MJD or a date` });
      }
      return {
        column,
        ...(unit === undefined ? {} : { unit }),
        ...(since === undefined ? {} : { since }),
        ...(from === undefined ? {} : { from }),
        ...(precision === "single" ? { single: true } : {}),
      };
    });
}

const columns = z.strictObject(
  Object.fromEntries(ROLES.map((role) => [role, use(role).optional()])) as Record<
    Role,
    z.ZodOptional<ReturnType<typeof use>>
  >,
);

const evenly = z
  .strictObject({
    start: frequency,
    step: frequency,
    channels: z.int().min(1).max(MOST_FREQUENCIES),
    subbands: z.int().min(1).max(4096).default(1),
    spacing: frequency.optional(),
  })
  .refine(({ channels, subbands }) => channels * subbands <= MOST_FREQUENCIES, "too many channels")
  .transform(({ start, step, channels, subbands, spacing = step * channels }) =>
    Array.from({ length: subbands }, (_, subband) =>
      Array.from({ length: channels }, (__, channel) => start + subband * spacing + channel * step),
    ),
  );
const frequencies = z
  .union(
    [
      z
        .array(frequency)
        .min(1)
        .transform((list) => [list]),
      z.array(z.array(frequency).min(1)).min(1).max(4096),
      evenly,
    ],
    {
      error:
        "expected a list of frequencies, a list of such lists (one a sub-band), or { start, step, channels, subbands }",
    },
  )
  .refine((subbands) => subbands.every((list) => list.length === subbands[0]!.length), {
    message: "the sub-bands have different numbers of channels: expected the same",
  });
const widths = z.union([frequency.transform((width) => [width]), z.array(frequency).min(1)]);

const polarization = z.string().transform((word, context): Polarization => {
  const found = POLARIZATIONS.find((name) => name === word.trim().toUpperCase());
  if (found !== undefined) return found;
  context.addIssue({
    code: "custom",
    message: `"${word}" is no polarization: expected one of ${POLARIZATIONS.join(" ")}`,
  });
  return z.NEVER;
});

const field = z.strictObject({
  id: z.int().min(0).optional(),
  name: text.optional(),
  ra: angleText(parseRightAscension, "8h30m00s").optional(),
  dec: angleText(parseDeclination, "-28d15m00s").optional(),
  equinox: z.number().min(1800).max(2200).optional(),
});
const antenna = z.strictObject({
  number: z.int().min(0).max(65_535).optional(),
  name: text.optional(),
  position: z.tuple([length, length, length], { error: "expected x, y, z in metres" }).nullable().optional(),
  diameter: length.optional(),
});
const setup = z.strictObject({
  id: z.int().min(0).optional(),
  frequencies,
  channel_width: widths.optional(),
});

const constants = z
  .strictObject({
    array: text.optional(),
    unit: text.optional(),
    polarizations: z.array(polarization).min(1).optional(),
    frequencies: frequencies.optional(),
    channel_width: widths.optional(),
    setups: z.array(setup).min(1).max(4096).optional(),
    reference_frequency: frequency.optional(),
    integration: duration.optional(),
    fields: z.array(field).min(1).max(65_536).optional(),
    antennas: z.array(antenna).min(1).max(65_536).optional(),
    antenna_positions: z.string().optional(),
    dish_diameter: length.optional(),
    frame: z.enum(["geocentric", "local"], { error: "expected geocentric or local" }).optional(),
    reference_date: epoch.optional(),
    /** degrees, Greenwich at 0h of the reference date */
    sidereal_time: z.number().optional(),
    degrees_per_day: z.number().optional(),
    ut1_minus_utc: duration.optional(),
    header: z.record(z.string(), text).optional(),
  })
  .refine((given) => given.frequencies === undefined || given.setups === undefined, {
    message: "both frequencies and setups are given: expected one of them",
  })
  .refine(({ polarizations: list }) => list === undefined || new Set(list).size === list.length, {
    message: "a polarization comes twice",
    path: ["polarizations"],
  })
  .transform((given): Constants => {
    const { frequencies: single, channel_width: width } = given;
    const setups: SetupConstant[] | undefined =
      single === undefined
        ? given.setups?.map((one, i) => ({
            id: one.id ?? i + 1,
            frequencies: one.frequencies,
            channelWidths: one.channel_width ?? width,
          }))
        : [{ id: 1, frequencies: single, channelWidths: width }];
    return {
      array: given.array,
      unit: given.unit,
      polarizations: given.polarizations,
      setups,
      channelWidth: width?.[0],
      referenceFrequency: given.reference_frequency,
      integration: given.integration,
      fields: given.fields?.map((one, i) => ({
        id: one.id ?? i + 1,
        name: one.name ?? `field ${one.id ?? i + 1}`,
        rightAscension: one.ra ?? Number.NaN,
        declination: one.dec ?? Number.NaN,
        equinox: one.equinox ?? (one.ra === undefined ? Number.NaN : 2000),
      })),
      antennas: given.antennas?.map((one, i) => ({
        number: one.number ?? i + 1,
        name: one.name ?? String(one.number ?? i + 1),
        position: one.position ?? null,
        diameter: one.diameter ?? given.dish_diameter ?? null,
      })),
      antennaFile: given.antenna_positions,
      diameter: given.dish_diameter,
      frame: given.frame,
      referenceDay: given.reference_date,
      siderealTime: given.sidereal_time,
      degreesPerDay: given.degrees_per_day,
      ut1MinusUtc: given.ut1_minus_utc,
      header: given.header,
    };
  });

export const mapSchema = z.strictObject({
  columns: columns.default({}),
  lists: z.array(z.enum(AXES, { error: `expected ${AXES.join(", ")}` })).optional(),
  constants: constants.optional(),
});
