/** Invented array layouts: metres east, north and up from the array's centre. */
import type { Vector3 } from "../geometry/earth.ts";
import { InputError } from "../util/errors.ts";
import { Random } from "./random.ts";
import type { Layout } from "./scenario.ts";
import { STREAM } from "./streams.ts";

/** @throws InputError when the antennas of a random layout do not fit */
export function antennaOffsets(layout: Layout, seed: number): Vector3[] {
  if (layout.kind === "positions") return layout.positions.map(([east, north, up]) => [east, north, up]);
  const random = Random.of(seed, STREAM.layout);
  const flat = flatOffsets(layout, random);
  return flat.map(([east, north]) => [
    east,
    north,
    layout.relief === 0 ? 0 : layout.relief * random.normal(),
  ]);
}

function flatOffsets(layout: Exclude<Layout, { kind: "positions" }>, random: Random): [number, number][] {
  switch (layout.kind) {
    case "spiral":
      return spiral(layout);
    case "ring":
      return Array.from({ length: layout.antennas }, (_, i) => {
        const azimuth = (2 * Math.PI * i) / layout.antennas;
        return [layout.radius * Math.sin(azimuth), layout.radius * Math.cos(azimuth)];
      });
    case "line":
      return Array.from({ length: layout.antennas }, (_, i) => {
        const along = layout.length * ((i / (layout.antennas - 1)) ** layout.crowding - 0.5);
        return [along * Math.sin(layout.azimuth), along * Math.cos(layout.azimuth)];
      });
    case "random":
      return scattered(layout, random);
  }
}

/** Antennas along logarithmic arms: radii grow by one factor from antenna to antenna, arms take turns. */
function spiral(layout: Extract<Layout, { kind: "spiral" }>): [number, number][] {
  const { antennas, arms, inner, radius, turns } = layout;
  return Array.from({ length: antennas }, (_, i) => {
    const along = antennas === 1 ? 0 : i / (antennas - 1);
    const r = inner * (radius / inner) ** along;
    const azimuth = 2 * Math.PI * ((i % arms) / arms + turns * along);
    return [r * Math.sin(azimuth), r * Math.cos(azimuth)];
  });
}

const TRIES_PER_ANTENNA = 2000;

function scattered(layout: Extract<Layout, { kind: "random" }>, random: Random): [number, number][] {
  const placed: [number, number][] = [];
  for (let tries = 0; placed.length < layout.antennas; tries++) {
    if (tries > TRIES_PER_ANTENNA * layout.antennas) {
      throw new InputError(
        `${layout.antennas} antennas do not fit ${layout.apart} m apart within ${layout.radius} m`,
        { part: "scenario, array.layout" },
        "Give fewer antennas, a larger radius or a smaller distance",
      );
    }
    const r = layout.radius * Math.sqrt(random.uniform());
    const azimuth = 2 * Math.PI * random.uniform();
    const [east, north] = [r * Math.sin(azimuth), r * Math.cos(azimuth)];
    if (placed.every(([e, n]) => Math.hypot(e - east, n - north) >= layout.apart)) placed.push([east, north]);
  }
  return placed;
}
