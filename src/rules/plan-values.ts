/** The plan as rule files see it: `plan.key`, in snake case, angles in radians, flux densities in Jy, lengths in m. */
import type { Plan, PlanValue } from "../imaging/plan.ts";
import { formatQuantity } from "./quantity.ts";

type Scalar = number | string | boolean;

interface PlanKey {
  readonly unit: string;
  /** as a sentence calls it */
  readonly words: string;
  readonly read: (plan: Plan) => PlanValue<unknown>;
  readonly scalar: (plan: Plan) => Scalar;
}

const KEYS = {
  field_of_view: number("rad", "field of view", (plan) => plan.fieldOfView),
  resolution: number("rad", "resolution", (plan) => plan.resolution),
  largest_scale: number("rad", "largest scale", (plan) => plan.largestScale),
  target_rms: number("Jy", "target rms", (plan) => plan.targetRms),
  dynamic_range: number("", "dynamic range", (plan) => plan.dynamicRange),
  dish_diameter: number("m", "dish diameter", (plan) => plan.dishDiameter),
  expected_sefd: number("Jy", "expected SEFD", (plan) => plan.expectedSefd),
  weighting: {
    unit: "",
    words: "weighting",
    read: (plan) => plan.weighting,
    scalar: (plan) => plan.weighting.value.kind,
  },
  corrects_w: {
    unit: "",
    words: "w correction",
    read: (plan) => plan.correctsW,
    scalar: (plan) => plan.correctsW.value,
  },
  purpose: {
    unit: "",
    words: "purpose",
    read: (plan) => plan.purpose,
    scalar: (plan) => plan.purpose.value,
  },
} satisfies Record<string, PlanKey>;

export type PlanKeyName = keyof typeof KEYS;
export const PLAN_KEYS = Object.keys(KEYS) as PlanKeyName[];

function number(unit: string, words: string, read: (plan: Plan) => PlanValue<number | null>): PlanKey {
  return { unit, words, read, scalar: (plan) => read(plan).value ?? Number.NaN };
}

export function isPlanKey(name: string): name is PlanKeyName {
  return Object.hasOwn(KEYS, name);
}

/** The value a rule computes with; NaN where the plan has none. */
export function planValue(plan: Plan, key: PlanKeyName): Scalar {
  return KEYS[key].scalar(plan);
}

export function planUnit(key: PlanKeyName): string {
  return KEYS[key].unit;
}

const ORIGINS = { given: "given", file: "from the file", derived: "derived", default: "default" } as const;

/** Such as `the plan's dynamic range (1000, given)`. */
export function planWords(plan: Plan, key: PlanKeyName): string {
  const { unit, words, read, scalar } = KEYS[key];
  const value = scalar(plan);
  const shown = typeof value === "number" ? formatQuantity(value, unit) : String(value);
  return `the plan's ${words} (${shown}, ${ORIGINS[read(plan).origin]})`;
}
