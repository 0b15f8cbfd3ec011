/** Faults as scenarios write them. Kinds that the detector names too bear its names. */
import { z } from "zod";
import { POLARIZATIONS } from "../../dataset/dataset.ts";
import { channelRanges, duration, length, strength } from "../quantities.ts";

const antennaNumber = z.int().min(1);
const pair = z.tuple([antennaNumber, antennaNumber]);
const share = z.number().gt(0).max(1);
const axis = z.enum(["u", "v", "w"]);

/** Which samples: the AND of what is given, as in flags.json. Times count from the start, both ends included. */
const where = {
  time: z.tuple([duration, duration]).optional(),
  subbands: z.array(z.int().min(0)).optional(),
  channels: channelRanges.optional(),
  polarizations: z.array(z.enum(POLARIZATIONS)).optional(),
  fields: z.array(z.int().min(1)).optional(),
};
/** every baseline to any of the antennas; these baselines; baselines shorter than this */
const whose = {
  antennas: z.array(antennaNumber).optional(),
  baselines: z.array(pair).optional(),
  shorter_than: length.optional(),
};
const rowsOf = {
  time: where.time,
  fields: where.fields,
  antennas: whose.antennas,
  baselines: whose.baselines,
};

const ofAntenna = { ...where, antenna: antennaNumber, hand: z.enum(["R", "L", "X", "Y"]).optional() };
const ofBaseline = { ...where, baseline: pair };

function fault<Kind extends string, Shape extends z.ZodRawShape>(kind: Kind, shape: Shape) {
  return z.strictObject({ kind: z.literal(kind), ...shape });
}

export const faultSchema = z.discriminatedUnion("kind", [
  // interference, added to the samples
  fault("persistent-line", { ...where, ...whose, amplitude: strength }),
  fault("burst", { ...where, ...whose, amplitude: strength }),
  /** moves from one channel to the other during `time`; `width` channels wide */
  fault("drifting-line", {
    ...where,
    ...whose,
    amplitude: strength,
    from_channel: z.int().min(0),
    to_channel: z.int().min(0),
    width: z.int().min(1).default(1),
  }),
  /** this share of the samples, at random */
  fault("lone-samples", { ...where, ...whose, amplitude: strength, share }),

  // an antenna's signal
  fault("silent-antenna", ofAntenna),
  fault("weak-antenna", { ...ofAntenna, factor: z.number().gt(0).lt(1) }),
  /** silent for this share of stretches of this length, at random */
  fault("dropout", { ...ofAntenna, share, stretch: duration.optional() }),
  /** signal and noise both */
  fault("gain-step", { ...ofAntenna, factor: z.number().gt(0) }),
  fault("hand-off", { ...where, antenna: antennaNumber, hand: z.enum(["R", "L", "X", "Y"]) }),
  fault("exchanged-hands", { time: where.time, fields: where.fields, antenna: antennaNumber }),
  fault("phase-jump", { ...ofAntenna, degrees: z.number() }),
  fault("half-turn", ofAntenna),
  fault("delay-slope", { ...ofAntenna, nanoseconds: z.number() }),
  /** rms, new in every integration */
  fault("phase-noise", { ...ofAntenna, degrees: z.number().gt(0) }),
  /** noise times this on the antenna's baselines */
  fault("noisy", { ...ofAntenna, factor: z.number().gt(1) }),

  // the correlator's: one baseline
  fault("baseline-phase", { ...ofBaseline, degrees: z.number() }),
  fault("baseline-gain", { ...ofBaseline, factor: z.number().gt(0) }),

  // values, weights and flags
  fault("stuck-zeros", { ...where, ...whose }),
  fault("not-finite", {
    ...where,
    ...whose,
    share: share.default(1),
    value: z.enum(["NaN", "Inf"]).default("NaN"),
    of: z.enum(["sample", "weight"]).default("sample"),
  }),
  fault("weight-mismatch", { ...where, ...whose, factor: z.number().gt(0) }),
  /** samples that the file holds as flagged already; no fault in itself */
  fault("flags", { ...where, ...whose, share: share.default(1) }),

  // rows
  fault("missing-rows", rowsOf),
  fault("duplicate-rows", rowsOf),
  /** these integrations are written last one first */
  fault("reversed-rows", { time: z.tuple([duration, duration]) }),

  // geometry
  fault("flipped-axis", { ...rowsOf, axis }),
  fault("zeroed-axis", { ...rowsOf, axis: axis.default("w") }),
  fault("wrong-unit", { ...rowsOf, unit: z.enum(["metres", "wavelengths"]) }),
  /**
   * `offset` east, north, up; `of` "table": the table alone; "uvw": u, v, w alone; "model": table, u, v, w and the delays
   * that the correlator tracked, so that table and u, v, w agree and the sky's phases show the error
   */
  fault("antenna-position", {
    antenna: antennaNumber,
    offset: z.tuple([length, length, length]),
    of: z.enum(["table", "uvw", "model"]),
  }),
  fault("swapped-order", rowsOf),
]);

export type Fault = z.output<typeof faultSchema>;
export type FaultKind = Fault["kind"];
export type FaultOf<Kind extends FaultKind> = Extract<Fault, { kind: Kind }>;
