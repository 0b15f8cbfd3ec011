/** Sources that image and data agree on. */
import { type Atoms, conjugatedAtoms } from "../samples/atoms.ts";
import { isConsistent } from "./consistent.ts";
import { type DataFit, fitToData } from "./fit-data.ts";
import { modelOf, type Source, type Visibilities, WHOLE } from "./model.ts";

/** A source that the data hold by fewer sigmas is none. */
const HELD_SIGMAS = 4;
/** Sources that leave more than this share of the data's power beyond noise are not those of the data. */
const MOST_LEFT = 0.9;
const ROUNDS = 4;

export interface Solved {
  readonly atoms: Atoms;
  readonly fit: DataFit;
  /** false: the data do not hold the sources of the image */
  readonly held: boolean;
}

const NOTHING: DataFit = { sources: [], errors: new Float64Array(0), left: 1 };

/** With the sign of the exponent that suits the data. */
export function solveSources(
  found: readonly Source[],
  gathered: Atoms,
  declination: number,
  beam: number,
): Solved {
  if (found.length === 0) return { atoms: gathered, fit: NOTHING, held: true };
  const usual = agreed(found, gathered, declination, beam);
  let best = { atoms: gathered, fit: usual };
  if (usual.left > 0.5) {
    const turned = conjugatedAtoms(gathered);
    const other = agreed(found, turned, declination, beam);
    if (other.left < 0.8 * usual.left) best = { atoms: turned, fit: other };
  }
  return { ...best, held: isHeld(best.fit, best.atoms) };
}

/** Fitted, without those that the data do not hold or not alike in all their parts. */
export function agreed(found: readonly Source[], atoms: Atoms, declination: number, beam: number): DataFit {
  const request = { atoms, declination, beam, rounds: ROUNDS };
  const first = fitToData(found, request);
  const rest = restOf(atoms, first.sources, declination);
  const kept = first.sources.filter((source, i) => {
    if (!(source.flux > 0) || source.flux < HELD_SIGMAS * first.errors[i]!) return false;
    return source.shape[0] !== 0 || isConsistent(source, rest, atoms, declination);
  });
  if (kept.length === 0) return NOTHING;
  return kept.length === found.length ? first : fitToData(kept, request);
}

/** The data less the sources. */
export function restOf(atoms: Atoms, sources: readonly Source[], declination: number): Visibilities {
  const model = modelOf(atoms, sources, WHOLE, declination, true);
  return {
    re: atoms.re.map((value, k) => value - model.re[k]!),
    im: atoms.im.map((value, k) => value - model.im[k]!),
  };
}

/** Faint data are mostly noise: what counts is the power beyond it. */
function isHeld({ sources, left }: DataFit, atoms: Atoms): boolean {
  if (sources.length === 0) return false;
  let all = 0;
  for (let k = 0; k < atoms.count; k++) all += atoms.weight[k]! * (atoms.re[k]! ** 2 + atoms.im[k]! ** 2);
  const noise = atoms.noise > 0 ? 2 * atoms.noise * atoms.count : 0;
  return left * all - noise < MOST_LEFT * (all - noise);
}
