/**
 * A scenario: an invented array, what it looks at, and what goes wrong. The schema turns what people write (units,
 * defaults left out) into a `Scenario` of SI numbers with every value there; `scenario-file.ts` reads the YAML.
 */
import { z } from "zod";
import { POLARIZATIONS } from "../dataset/dataset.ts";
import { InputError, nearest } from "../util/errors.ts";
import { faultSchema } from "./faults/schema.ts";
import { angle, declination, duration, flux, frequency, length, rightAscension } from "./quantities.ts";
import { schemaWords } from "./scenario-words.ts";

const positive = (schema: z.ZodType<number, string | 0>) =>
  schema.refine((value) => value > 0, "must be greater than zero");

const notNegative = (schema: z.ZodType<number, string | 0>) =>
  schema.refine((value) => value >= 0, "must not be less than zero");

const offsets = z.tuple([length, length, length]);

/** What random groups can name in one number a baseline. */
const MOST_ANTENNAS = 2047;

/** Where the antennas stand, east, north and up from the array's centre. */
const layout = z.discriminatedUnion("kind", [
  z.strictObject({
    kind: z.literal("spiral"),
    antennas: z.int().min(3).max(MOST_ANTENNAS),
    /** of the outermost antenna */
    radius: positive(length),
    /** of the innermost antenna */
    inner: positive(length).default(20),
    arms: z.int().min(1).max(16).default(3),
    /** turns an arm makes from the inner to the outer radius */
    turns: z.number().min(0).max(10).default(0.6),
    /** rms height of the ground */
    relief: notNegative(length).default(0),
  }),
  z.strictObject({
    kind: z.literal("ring"),
    antennas: z.int().min(3).max(MOST_ANTENNAS),
    radius: positive(length),
    relief: notNegative(length).default(0),
  }),
  z.strictObject({
    kind: z.literal("random"),
    antennas: z.int().min(3).max(MOST_ANTENNAS),
    radius: positive(length),
    /** no two antennas stand closer */
    apart: positive(length).default(20),
    relief: notNegative(length).default(0),
  }),
  z.strictObject({
    kind: z.literal("line"),
    antennas: z.int().min(3).max(MOST_ANTENNAS),
    /** between the first and the last antenna */
    length: positive(length),
    /** direction of the line, from north through east */
    azimuth: angle.default(Math.PI / 2),
    /** 1: evenly spaced; above: closer at the start */
    crowding: z.number().min(0.2).max(5).default(1),
    relief: notNegative(length).default(0),
  }),
  z.strictObject({ kind: z.literal("positions"), positions: z.array(offsets).min(3).max(MOST_ANTENNAS) }),
]);

const array = z.strictObject({
  name: z.string().min(1).max(40),
  latitude: angle.refine((value) => Math.abs(value) <= Math.PI / 2, "lies between -90deg and 90deg"),
  /** east */
  longitude: angle,
  height: length.default(0),
  layout,
  /** antenna numbers in the order of the layout; default 1, 2, 3 ... */
  numbers: z.array(z.int().min(1).max(2047)).optional(),
  diameter: positive(length).default(12),
  /** system equivalent flux density of one product */
  sefd: positive(flux).default(400),
  /** of antennas that differ, by number */
  sefds: z.record(z.string().regex(/^\d+$/, "keys are antenna numbers"), positive(flux)).default({}),
  /** of antennas that stand above (or below) their layout, by number: metres up */
  heights: z.record(z.string().regex(/^\d+$/, "keys are antenna numbers"), length).default({}),
  /** 0 < efficiency <= 1 of the correlation */
  efficiency: z.number().gt(0).max(1).default(1),
  /** frame of the written positions */
  frame: z.enum(["geocentric", "local"]).default("geocentric"),
});

const time = z.strictObject({
  /** UTC, ISO 8601 */
  start: z.string(),
  /** from the start of the first integration to the end of the last, gaps between scans included */
  duration: positive(duration),
  integration: positive(duration).default(10),
  /** scans of this length with this gap after each; default one scan */
  scan: positive(duration).optional(),
  gap: notNegative(duration).default(0),
});

const frequencies = z.strictObject({
  /** centre of the first channel of sub-band 0 */
  start: positive(frequency),
  subbands: z.int().min(1).max(64).default(1),
  /** between the first channels of neighbouring sub-bands; default end to end */
  spacing: positive(frequency).optional(),
  channels: z.int().min(1).max(65536),
  width: positive(frequency),
  /** frequency falls as the channel number rises */
  descending: z.boolean().default(false),
});

const field = z.strictObject({
  name: z.string().min(1).max(16),
  ra: rightAscension,
  dec: declination.refine((value) => Math.abs(value) <= Math.PI / 2, "lies between -90deg and 90deg"),
});

const source = z
  .strictObject({
    /** at the reference frequency; Stokes I */
    flux: flux.default(0),
    /** offset from the phase centre, direction cosines of these angles: l east, m north */
    east: angle.default(0),
    north: angle.default(0),
    /** Gaussian, full widths at half maximum; 0 a point */
    major: notNegative(angle).default(0),
    minor: notNegative(angle).optional(),
    /** position angle of the major axis, from north through east */
    angle: angle.default(0),
    /** flux ~ frequency ** index */
    spectral_index: z.number().min(-10).max(10).default(0),
    /** default the middle of the band */
    reference: positive(frequency).optional(),
    /** fractions of Stokes I */
    q: z.number().min(-1).max(1).default(0),
    u: z.number().min(-1).max(1).default(0),
    v: z.number().min(-1).max(1).default(0),
    /** a spectral line, Gaussian in frequency */
    line: z.strictObject({ centre: positive(frequency), width: positive(frequency), flux }).optional(),
    /** brightness as it passes through a beam: Gaussian in time, greatest at `at` after the start */
    transit: z.strictObject({ at: duration, width: positive(duration) }).optional(),
    /** Field numbers from 1 in which it is seen; default all */
    fields: z.array(z.int().min(1)).optional(),
  })
  .refine(
    ({ east, north }) => Math.sin(east) ** 2 + Math.sin(north) ** 2 < 1,
    "the source lies beyond the sky",
  );

const gains = z.strictObject({
  /** rms of the natural logarithm of an antenna's and hand's amplitude */
  amplitude: z.number().min(0).max(2).default(0),
  /** rms of its constant phase */
  phase: angle.default(0),
  /** shape of each antenna's, hand's and sub-band's passband, as a correlator without calibration gives it */
  bandpass: z
    .strictObject({
      /** share of the channels at each edge in which the passband falls off */
      edge: z.number().min(0).max(0.5).default(0.1),
      /** amplitude left in the outermost channel */
      edge_level: z.number().min(0).max(1).default(0.1),
      /** rms of the amplitude across the band */
      ripple: z.number().min(0).max(0.5).default(0.05),
      /** rms of the phase across the band */
      phase: angle.default(0),
    })
    .optional(),
  /** rms of each antenna's complex leakage between hands */
  leakage: z.number().min(0).max(0.5).default(0),
});

const atmosphere = z.discriminatedUnion("kind", [
  /** each antenna's phase walks on its own */
  z.strictObject({ kind: z.literal("walk"), rms_per_minute: angle }),
  /** a turbulent sheet that drifts over the array: neighbours wander together */
  z.strictObject({
    kind: z.literal("turbulence"),
    /** rms phase difference on a baseline of 1 km */
    rms_at_1km: angle,
    /** metres a second */
    speed: z.number().gt(0).max(200).default(10),
    /** the largest eddies */
    outer_scale: positive(length).default(6000),
  }),
]);

const scenarioSchema = z.strictObject({
  name: z.string().min(1).max(60),
  /** what the dataset shows, for people */
  about: z.string().optional(),
  seed: z.int().min(0).default(1),
  array,
  time,
  frequency: frequencies,
  polarizations: z.array(z.enum(POLARIZATIONS)).min(1).max(4).default(["RR", "LL"]),
  /** scans take them in turn */
  fields: z.array(field).min(1),
  sky: z.array(source).default([]),
  /** times the radiometer equation; 0 switches the noise off */
  noise: z.number().min(0).default(1),
  gains: gains.prefault({}),
  atmosphere: atmosphere.optional(),
  /** 1/sigma^2 times this; "unity": every weight is 1 */
  weights: z.union([z.number().gt(0), z.literal("unity")]).default(1),
  /** channel width and integration time dim sources away from the phase centre, as they do */
  smearing: z.boolean().default(true),
  autocorrelations: z.boolean().default(false),
  order: z.enum(["time-baseline", "baseline-time"]).default("time-baseline"),
  unit: z.enum(["Jy", "uncalibrated"]).default("Jy"),
  faults: z.array(faultSchema).default([]),
});

export type ScenarioInput = z.input<typeof scenarioSchema>;
export type Scenario = z.output<typeof scenarioSchema>;
export type Source = Scenario["sky"][number];
export type Gains = Scenario["gains"];
export type Atmosphere = NonNullable<Scenario["atmosphere"]>;
export type Layout = Scenario["array"]["layout"];

/** Something wrong in a scenario: keys and indices down to it, and the key when the key itself is wrong. */
export interface ScenarioIssue {
  readonly path: readonly (string | number)[];
  readonly key?: string;
  readonly message: string;
}

/** Check and complete what was written: the scenario, or everything that is wrong with it. */
export function checkScenario(
  written: unknown,
): { scenario: Scenario } | { issues: readonly ScenarioIssue[] } {
  const result = scenarioSchema.safeParse(written);
  if (result.success) return { scenario: result.data };
  const issues = result.error.issues.flatMap((issue) => explain(issue, written));
  // A misspelt key is why another is missing: it comes first.
  return {
    issues: [
      ...issues.filter(({ key }) => key !== undefined),
      ...issues.filter(({ key }) => key === undefined),
    ],
  };
}

const { keys: KEYS, words: WORDS } = schemaWords(scenarioSchema);

function explain(issue: z.core.$ZodIssue, written: unknown): ScenarioIssue[] {
  const path = issue.path.map((part) => (typeof part === "number" ? part : String(part)));
  if (issue.code === "unrecognized_keys") {
    return issue.keys.map((key) => ({ path, key, message: `unknown key "${key}"${didYouMean(key, KEYS)}` }));
  }
  const found = path.reduce<unknown>(
    (value, step) => (value as Record<string, unknown> | undefined)?.[step],
    written,
  );
  if (found === undefined) return [{ path, message: "a value is missing here" }];
  if (issue.code === "invalid_union" && issue.discriminator !== undefined) {
    const kind = String(found);
    return [{ path, message: `unknown ${issue.discriminator} "${kind}"${didYouMean(kind, WORDS)}` }];
  }
  if (issue.code === "invalid_value") {
    const choices = issue.values.map(String);
    return [
      {
        path,
        message: `"${String(found)}" is not one of ${choices.join(", ")}${didYouMean(String(found), choices)}`,
      },
    ];
  }
  return [{ path, message: issue.message }];
}

function didYouMean(word: string, known: Iterable<string>): string {
  const near = nearest(word, known);
  return near === undefined || near === word ? "" : `: did you mean "${near}"?`;
}

/** A scenario written in code. @throws InputError naming the first thing wrong */
export function scenarioOf(written: ScenarioInput): Scenario {
  const result = checkScenario(written);
  if ("scenario" in result) return result.scenario;
  const issue = result.issues[0]!;
  throw new InputError(issue.message, { part: `scenario, ${issue.path.join(".")}` });
}
