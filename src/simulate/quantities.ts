/** Scenario values with units, as schema parts that give SI numbers: seconds, Hz, metres, Jy, radians. */
import { z } from "zod";
import { InputError } from "../util/errors.ts";
import { parseAngle, parseDuration, parseFlux, parseFrequency, parseLength } from "../util/units.ts";

function quantity(parse: (text: string) => number, what: string) {
  return z
    .union([z.string(), z.literal(0)], { error: `expected ${what} with its unit` })
    .transform((text, context) => {
      if (text === 0) return 0;
      try {
        return parse(text);
      } catch (error) {
        if (!(error instanceof InputError)) throw error;
        context.addIssue({ code: "custom", message: error.line });
        return z.NEVER;
      }
    });
}

export const angle = quantity(parseAngle, 'an angle such as "30arcmin"');
export const duration = quantity(parseDuration, 'a duration such as "10s"');
export const frequency = quantity(parseFrequency, 'a frequency such as "1.4GHz"');
export const flux = quantity(parseFlux, 'a flux density such as "0.1Jy"');
export const length = quantity(parseLength, 'a length such as "25m"');

/** Right ascension: an angle, or hours, minutes and seconds of time ("5h34m32.0s"). */
export const rightAscension = quantity(
  (text) => sexagesimal(text, "h", Math.PI / 12),
  'a right ascension such as "5h34m32s" or "83.6deg"',
);

/** Declination: an angle, or degrees, minutes and seconds of arc ("-12d30m00s"). */
export const declination = quantity(
  (text) => sexagesimal(text, "d", Math.PI / 180),
  'a declination such as "-12d30m" or "-12.5deg"',
);

function sexagesimal(text: string, mark: "h" | "d", radiansPerUnit: number): number {
  const match = /^([+-]?)(\d+)([hd])(?:(\d+)m)?(?:(\d+(?:\.\d+)?)s)?$/.exec(text.trim());
  if (match === null) return parseAngle(text);
  const [, sign, whole, unit, minutes = "0", seconds = "0"] = match;
  if (unit !== mark || Number(minutes) >= 60 || Number(seconds) >= 60) return parseAngle(text);
  const size = Number(whole) + Number(minutes) / 60 + Number(seconds) / 3600;
  return (sign === "-" ? -size : size) * radiansPerUnit;
}

/** How strong an interference is: in sigmas of one sample's real part, or in Jy. */
export interface Strength {
  readonly value: number;
  readonly unit: "sigma" | "Jy";
}

export const strength = z
  .string({ error: 'expected a strength such as "8 sigma" or "3Jy"' })
  .transform((text, context): Strength => {
    const match = /^(\d+(?:\.\d+)?)\s*sigma$/.exec(text.trim());
    if (match !== null) return { value: Number(match[1]), unit: "sigma" };
    try {
      const value = parseFlux(text);
      if (value > 0) return { value, unit: "Jy" };
      context.addIssue({ code: "custom", message: "must be greater than zero" });
      return z.NEVER;
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      context.addIssue({ code: "custom", message: `${error.line}; or in noise, such as "8 sigma"` });
      return z.NEVER;
    }
  });

/** Channel ranges from 0, both ends included: "8-14,20", or pairs as in flags.json. */
export const channelRanges = z
  .union([
    z
      .string()
      .regex(/^\s*\d+(\s*-\s*\d+)?(\s*,\s*\d+(\s*-\s*\d+)?)*\s*$/, 'expected channels such as "8-14,20"'),
    z.array(z.tuple([z.int().min(0), z.int().min(0)])),
  ])
  .transform((ranges): readonly (readonly [number, number])[] =>
    typeof ranges === "string"
      ? ranges.split(",").map((range) => {
          const [low, high] = range.split("-").map(Number) as [number, number?];
          return [low, high ?? low] as const;
        })
      : ranges,
  )
  .refine((ranges) => ranges.every(([low, high]) => low <= high), "a channel range runs from low to high");
