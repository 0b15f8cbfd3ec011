/** What a comparison of u, v, w with the tables means: the smallest fault that explains it, in a word and a sentence. */
import type { AntennaOffset } from "./antenna-offsets.ts";
import { AGREEMENT, type Orientation, signsOf, unitOfScale } from "./compare-uvw.ts";

export type GeometryFault =
  | "axis"
  | "unit"
  | "scale"
  | "mirrored"
  | "hour-angle"
  | "antenna-order"
  | "antenna-position"
  | "unexplained";

export interface GeometryJudgement {
  readonly orientation: Orientation;
  readonly relativeRms: number;
  readonly repairedRms: number;
  readonly fault: GeometryFault | null;
  readonly faultText: string | null;
  readonly axisFault: string | null;
  readonly unitFault: string | null;
  readonly signReversed: boolean;
  /** radians, turn of (u, v) against the expected, from v towards u */
  readonly rotation: number;
  /** whether the frame ties down the hour angle */
  readonly turnKnown: boolean;
  /** baselines with the other sign than most */
  readonly reversed: readonly (readonly [number, number])[];
  /** by antenna number; empty when it could not be solved */
  readonly offsets: ReadonlyMap<number, AntennaOffset>;
  readonly offAntenna: number | null;
  readonly baselines: readonly BaselineFit[];
}

export interface BaselineFit {
  readonly antenna1: number;
  readonly antenna2: number;
  readonly relativeRms: number;
  readonly reversed: boolean;
}

/** What is left of u, v, w once the axes are put right. */
export interface Rest {
  /** of |uvw| */
  readonly rms: number;
  /** radians, turn of (u, v) */
  readonly rotation: number;
}

const AXES = ["u", "v", "w"] as const;

export interface Findings {
  readonly orientation: Orientation;
  readonly asIs: number;
  readonly turnKnown: boolean;
  readonly frequency: number;
  readonly rest: Rest;
  readonly reversed: readonly (readonly [number, number])[];
  readonly offsets: ReadonlyMap<number, AntennaOffset>;
  readonly off: number | null;
  readonly baselines: readonly BaselineFit[];
}

export function concludeGeometry(found: Findings): GeometryJudgement {
  const { orientation, rest, reversed, offsets, off } = found;
  const { scale, map } = orientation.fit;
  const signs = signsOf(map);
  const axisFault = axisWord(orientation);
  const unitFault = Math.abs(scale - 1) > AGREEMENT ? unitOfScale(scale, found.frequency) : null;
  const [fault, faultText] = worst(found, axisFault, unitFault);
  return {
    orientation,
    relativeRms: found.asIs,
    repairedRms: rest.rms,
    fault,
    faultText,
    axisFault,
    unitFault,
    signReversed: signs.reversed,
    rotation: rest.rotation,
    turnKnown: found.turnKnown,
    reversed,
    offsets,
    offAntenna: off,
    baselines: found.baselines,
  };
}

function axisWord({ fit, zero }: Orientation): string | null {
  const empty = zero.findIndex((isZero) => isZero);
  if (empty >= 0) return `zeroed-${AXES[empty]}`;
  const moved = fit.map.axis.flatMap((axis, k) => (axis === k ? [] : [AXES[k]!]));
  if (moved.length > 0) return `swapped-${moved.join("-")}`;
  const { flipped } = signsOf(fit.map);
  return flipped === null ? null : `flipped-${AXES[flipped]}`;
}

/** The fault that comes before the others, and a sentence without hostile text. */
function worst(
  found: Findings,
  axisFault: string | null,
  unitFault: string | null,
): [GeometryFault | null, string | null] {
  const { orientation, rest, reversed, off, offsets, turnKnown } = found;
  const { scale, turn } = orientation.fit;
  if (unitFault !== null) {
    return [
      "unit",
      `u, v, w are ${unitFault} where seconds are due: ${scale.toPrecision(4)} times what they should be`,
    ];
  }
  if (axisFault !== null) return ["axis", axisSentence(axisFault)];
  if (Math.abs(scale - 1) > AGREEMENT)
    return ["scale", `u, v, w are ${scale.toPrecision(4)} times what they should be`];
  if (orientation.mirrored)
    return ["mirrored", "the antenna table runs west where east is due: its y is turned round"];
  if (turnKnown && Math.abs(turn) > AGREEMENT) {
    const degrees = (turn * 180) / Math.PI;
    return [
      "hour-angle",
      `u, v, w are turned by ${degrees.toFixed(2)} degrees about the pole against times and positions: a time wrong by ${(degrees * 3.989).toFixed(1)} minutes, a wrong longitude or a wrong frame would do that`,
    ];
  }
  if (reversed.length > 0) {
    const names = reversed.slice(0, 4).map(([a, b]) => `${a}-${b}`);
    const more = reversed.length > 4 ? ` and ${reversed.length - 4} more` : "";
    return [
      "antenna-order",
      `baseline${reversed.length === 1 ? "" : "s"} ${names.join(", ")}${more} have u, v, w of the other sign: the antennas are named the other way round`,
    ];
  }
  if (off !== null) {
    const { distance: metres } = offsets.get(off)!;
    return [
      "antenna-position",
      `antenna ${off} stands ${metres.toPrecision(3)} m from its place in the table, by its u, v, w`,
    ];
  }
  if (rest.rms > AGREEMENT) {
    return [
      "unexplained",
      `u, v, w differ from those of the antenna table by ${(rest.rms * 100).toPrecision(2)} % rms, without a pattern`,
    ];
  }
  return [null, null];
}

function axisSentence(word: string): string {
  const [what, ...axes] = word.split("-");
  const names = axes.join(" and ");
  if (what === "zeroed") return `${names} is zero throughout, though the antenna positions give one`;
  if (what === "flipped") return `${names} has the wrong sign`;
  return `${axes.join(", ")} hold each other's values`;
}
