/** Phase that the air adds to each antenna, and how it wanders. Delays: the phase is proportional to frequency. */

import { geocentricToLocal, localToEnu } from "../geometry/earth.ts";
import { SECONDS_PER_DAY } from "../util/constants.ts";
import type { Observation } from "./observation.ts";
import { Random } from "./random.ts";
import type { Atmosphere } from "./scenario.ts";
import { STREAM } from "./streams.ts";

/**
 * (integrations x antennas) delay in turns a Hz: phase = 2 pi nu x this.
 * null where the scenario has no atmosphere.
 */
export function atmosphericDelays(observation: Observation): Float64Array | null {
  const { atmosphere } = observation.scenario;
  if (atmosphere === undefined) return null;
  const phases =
    atmosphere.kind === "walk" ? walk(observation, atmosphere) : turbulence(observation, atmosphere);
  const perRadian = 1 / (2 * Math.PI * observation.bandCentre);
  for (let i = 0; i < phases.length; i++) phases[i]! *= perRadian;
  return phases;
}

function walk(observation: Observation, atmosphere: Extract<Atmosphere, { kind: "walk" }>): Float64Array {
  const { times, stations, scenario } = observation;
  const phases = new Float64Array(times.length * stations.length);
  const random = new Random();
  for (let antenna = 0; antenna < stations.length; antenna++) {
    random.restart(scenario.seed, STREAM.atmosphere, antenna);
    let phase = 0;
    for (let t = 0; t < times.length; t++) {
      const minutes = t === 0 ? 0 : ((times[t]! - times[t - 1]!) * SECONDS_PER_DAY) / 60;
      phase += atmosphere.rms_per_minute * Math.sqrt(minutes) * random.normal();
      phases[t * stations.length + antenna] = phase;
    }
  }
  return phases;
}

/** Waves of the sheet: enough that no two antennas see a repeated pattern, few enough to be quick. */
const WAVES = 96;

/**
 * A frozen sheet of Kolmogorov turbulence: phase power ~ k^(-11/3) in two dimensions, so that a wave of a logarithmic
 * step in k has the variance k^(-5/3), and the structure function goes as distance^(5/3).
 * @see Thompson, Moran & Swenson 2017, Interferometry and Synthesis in Radio Astronomy, 3rd ed., section 13.1
 */
function turbulence(
  observation: Observation,
  atmosphere: Extract<Atmosphere, { kind: "turbulence" }>,
): Float64Array {
  const { times, stations, scenario, start } = observation;
  const random = Random.of(scenario.seed, STREAM.atmosphere, -1);
  const largest = (2 * Math.PI) / atmosphere.outer_scale;
  const smallest = (2 * Math.PI) / Math.min(20, atmosphere.outer_scale / 50);
  const wind = 2 * Math.PI * random.uniform();
  const waves = Array.from({ length: WAVES }, (_, i) => {
    const k = largest * (smallest / largest) ** ((i + random.uniform()) / WAVES);
    const direction = 2 * Math.PI * random.uniform();
    return {
      east: k * Math.sin(direction),
      north: k * Math.cos(direction),
      size: k ** (-5 / 6),
      phase: 2 * Math.PI * random.uniform(),
    };
  });
  const scale = atmosphere.rms_at_1km / Math.sqrt(structureAt(1000, waves));
  const ground = stations.map(({ actual }) =>
    localToEnu(geocentricToLocal(actual, scenario.array.longitude), scenario.array.latitude),
  );
  const phases = new Float64Array(times.length * stations.length);
  for (let t = 0; t < times.length; t++) {
    const drift = (times[t]! - start) * SECONDS_PER_DAY * atmosphere.speed;
    const driftEast = drift * Math.sin(wind);
    const driftNorth = drift * Math.cos(wind);
    for (let antenna = 0; antenna < stations.length; antenna++) {
      const east = ground[antenna]![0] - driftEast;
      const north = ground[antenna]![1] - driftNorth;
      let phase = 0;
      for (const wave of waves) {
        phase += wave.size * Math.cos(wave.east * east + wave.north * north + wave.phase);
      }
      phases[t * stations.length + antenna] = scale * phase;
    }
  }
  return phases;
}

/** Mean squared phase difference at a distance, averaged over directions: sum of size^2 (1 - J0(k d)). */
function structureAt(
  distance: number,
  waves: readonly { readonly east: number; readonly north: number; readonly size: number }[],
): number {
  let sum = 0;
  for (const { east, north, size } of waves)
    sum += size * size * (1 - besselJ0(Math.hypot(east, north) * distance));
  return sum;
}

/** J0 as its own definition: the mean of cos(x cos a) over a circle, exact to rounding for x < 300 with these steps. */
function besselJ0(x: number): number {
  const steps = Math.max(64, Math.ceil(2 * x));
  let sum = 0;
  for (let i = 0; i < steps; i++) sum += Math.cos(x * Math.cos((Math.PI * (i + 0.5)) / steps));
  return sum / steps;
}
