/** Products of the Stokes axis: which hand of each antenna they join and what of the sky they see. */
import type { Polarization } from "../dataset/dataset.ts";
import { InputError } from "../util/errors.ts";

export type Hand = "R" | "L" | "X" | "Y";

/** Places of the four feed products in a row's work arrays: first hand x 2 + second hand. */
export interface Product {
  readonly name: Polarization;
  /** 0: R or X, 1: L or Y; both 0 for a Stokes parameter */
  readonly hand1: 0 | 1;
  readonly hand2: 0 | 1;
  /** a combination of feed products, whose noise is 1/sqrt 2 of theirs (half the sum of two) */
  readonly stokes: 0 | 1 | 2 | 3 | null;
}

const STOKES: readonly Polarization[] = ["I", "Q", "U", "V"];
const FIRST_HANDS = "RX";

/** @throws InputError when feeds of two kinds, or feeds and Stokes parameters, are mixed, or one stands twice */
export function productsOf(polarizations: readonly Polarization[]): Product[] {
  const kinds = new Set(polarizations.map(kindOf));
  if (kinds.size > 1 || new Set(polarizations).size < polarizations.length) {
    throw new InputError(
      `polarizations ${polarizations.join(", ")} do not belong on one axis`,
      { part: "scenario, polarizations" },
      "Take them from R and L, or from X and Y, or from I, Q, U and V, each once",
    );
  }
  return polarizations.map((name): Product => {
    const stokes = STOKES.indexOf(name);
    if (stokes >= 0) return { name, hand1: 0, hand2: 0, stokes: stokes as 0 | 1 | 2 | 3 };
    return {
      name,
      hand1: FIRST_HANDS.includes(name[0]!) ? 0 : 1,
      hand2: FIRST_HANDS.includes(name[1]!) ? 0 : 1,
      stokes: null,
    };
  });
}

function kindOf(name: Polarization): "stokes" | "circular" | "linear" {
  if (STOKES.includes(name)) return "stokes";
  return /[RL]/.test(name) ? "circular" : "linear";
}

export function isCircular(polarizations: readonly Polarization[]): boolean {
  return kindOf(polarizations[0]!) === "circular";
}

/** The hands that the products join; none for Stokes parameters. */
export function handsOf(polarizations: readonly Polarization[]): Hand[] {
  const kind = kindOf(polarizations[0]!);
  if (kind === "stokes") return [];
  return kind === "circular" ? ["R", "L"] : ["X", "Y"];
}

export function handIndex(hand: Hand): 0 | 1 {
  return FIRST_HANDS.includes(hand) ? 0 : 1;
}
