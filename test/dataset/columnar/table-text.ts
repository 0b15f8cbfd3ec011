/** Small CSV tables of visibilities for tests, and what a table of them is read as. */
import { mkdtempSync, writeFileSync } from "node:fs";
import { tmpdir } from "node:os";
import { join } from "node:path";

export const folder = mkdtempSync(join(tmpdir(), "visvet-test-columnar-"));

let made = 0;

/** A file of its own with this text; with `map`, a column map beside it. */
export function tableFile(text: string, options: { map?: string; suffix?: string } = {}): string {
  made += 1;
  const path = join(folder, `table${made}${options.suffix ?? ".csv"}`);
  writeFileSync(path, text);
  if (options.map !== undefined) writeFileSync(`${path}.columns.yaml`, options.map);
  return path;
}

export interface TestSample {
  readonly time: number;
  readonly a1: number;
  readonly a2: number;
  readonly channel: number;
  readonly pol: string;
  readonly re: number;
  readonly im: number;
  readonly weight: number;
}

export const HEADER = "mjd,ant1,ant2,u_m,v_m,w_m,channel,freq_MHz,pol,real,imag,weight";

export function lineOf({ time, a1, a2, channel, pol, re, im, weight }: TestSample): string {
  const uvw = [100 * (a2 - a1), 10 * a1, a2].join(",");
  return `${time},${a1},${a2},${uvw},${channel},${1400 + channel},${pol},${re},${im},${weight}`;
}

export function csvOf(samples: readonly TestSample[]): string {
  return `${[HEADER, ...samples.map(lineOf)].join("\n")}\n`;
}

/** Every sample of `antennas` antennas at `times` times, channel and polarization fastest; each value its own. */
export function gridSamples(
  antennas: number,
  times: number,
  channels: number,
  pols = ["XX", "YY"],
): TestSample[] {
  const samples: TestSample[] = [];
  for (let t = 0; t < times; t++) {
    for (let a1 = 1; a1 <= antennas; a1++) {
      for (let a2 = a1 + 1; a2 <= antennas; a2++) {
        for (let channel = 0; channel < channels; channel++) {
          for (const pol of pols) {
            const re = samples.length + 0.25;
            samples.push({
              time: 60_000 + t / 8640,
              a1,
              a2,
              channel,
              pol,
              re,
              im: -re,
              weight: 1 + (re % 7),
            });
          }
        }
      }
    }
  }
  return samples;
}
