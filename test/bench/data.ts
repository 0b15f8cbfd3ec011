/** The observations that the whole program is measured on: invented, with an ordinary share of faults. */
import { mkdtempSync, rmSync, statSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";
import { MAIN, timed } from "./measure.ts";

export interface Wanted {
  readonly antennas: number;
  readonly channels: number;
  readonly megabytes: number;
  /** without, there is nothing to flag and no second look */
  readonly faults: boolean;
}

export const folder = mkdtempSync(join(tmpdir(), "visvet-bench-"));
process.on("exit", () => rmSync(folder, { recursive: true, force: true }));

const INTEGRATION_SECONDS = 5;
const PRODUCTS = 2;
/** Bytes of a sample, and of what a row has besides. */
const SAMPLE = 12;
const PARAMETERS = 28;

/** A random-groups file of about that size, made anew. */
export function observation({ antennas, channels, megabytes, faults }: Wanted): {
  path: string;
  bytes: number;
} {
  const rowBytes = PARAMETERS + SAMPLE * channels * PRODUCTS;
  const rows = (megabytes * 1e6) / rowBytes;
  const integrations = Math.max(8, Math.round(rows / ((antennas * (antennas - 1)) / 2)));
  const name = `${antennas}-${channels}-${megabytes}-${faults ? "faults" : "clean"}`;
  const end = integrations * INTEGRATION_SECONDS;
  const scenario = `name: bench
seed: 20261201
array:
  name: Larkfield Array
  latitude: -31.2deg
  longitude: 116.4deg
  layout: { kind: spiral, antennas: ${antennas}, arms: 3, inner: 40m, radius: 1.5km, turns: 0.7 }
  diameter: 12m
  sefd: 400Jy
time: { start: 2026-03-02T02:00:00, duration: ${end}s, integration: ${INTEGRATION_SECONDS}s }
frequency: { start: 1.392GHz, channels: ${channels}, width: ${32000 / channels}kHz }
fields:
  - { name: Heron Field, ra: 8h30m00s, dec: -28d00m00s }
sky:
  - { flux: 1.5Jy }
  - { flux: 0.3Jy, east: 4arcmin, north: -2.5arcmin }
`;
  const wrong = `faults:
  - { kind: silent-antenna, antenna: 4 }
  - { kind: persistent-line, channels: "${Math.floor(channels / 3)}", amplitude: 6 sigma }
  - { kind: burst, channels: "${Math.floor(channels / 2)}-${Math.floor(channels / 2) + 3}", time: [${Math.floor(end / 3)}s, ${Math.floor(end / 3) + 60}s], amplitude: 10 sigma }
`;
  const file = join(folder, `${name}.yaml`);
  const path = join(folder, `${name}.uvfits`);
  writeFileSync(file, faults ? scenario + wrong : scenario);
  timed(process.execPath, [MAIN, "simulate", file, "--out", path]);
  return { path, bytes: statSync(path).size };
}

/** A file that was made here, with the truth beside it. */
export function forget(path: string): void {
  rmSync(path, { force: true });
  rmSync(path.replace(/\.uvfits$/, ".truth.json"), { force: true });
}
