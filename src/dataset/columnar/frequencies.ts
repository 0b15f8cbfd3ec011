/** Frequency setups: from the constants of the map, from a column of frequencies, or from both. */
import { InputError } from "../../util/errors.ts";
import type { Setup } from "../dataset.ts";
import type { Notes } from "../notes.ts";
import { axisCodes } from "./axis-codes.ts";
import type { ColumnMap, SetupConstant } from "./column-map.ts";
import type { FoundFrequencies, FoundLabels } from "./find-labels.ts";
import type { Label } from "./labels.ts";

/** Channel centres of all setups that are held: 128 MB. */
const MOST_FREQUENCIES = 1 << 24;

/** Which channel a cell means: by its number, or by its frequency in Hz within a setup and sub-band. */
export type ChannelCodes =
  | { readonly by: "number"; readonly codes: ReadonlyMap<Label, number> }
  | {
      readonly by: "frequency";
      /** (setups x subbands), by Hz */
      readonly codes: readonly ReadonlyMap<number, number>[];
    };

export interface ResolvedFrequencies {
  readonly channels: number;
  readonly channelOf: ChannelCodes | undefined;
  readonly setups: readonly Setup[];
  readonly setupOf: ReadonlyMap<Label, number> | undefined;
}

interface Request {
  readonly map: ColumnMap;
  readonly found: FoundLabels;
  readonly subbandOf: ReadonlyMap<Label, number> | undefined;
  readonly subbands: number;
  readonly notes: Notes;
  readonly file: string;
}

/** @throws InputError when nothing tells the frequencies, or sub-bands differ in their channels */
export function resolveFrequencies(request: Request): ResolvedFrequencies {
  const { map, found, subbands, notes, file } = request;
  const ids = found.labels.get("setup")?.sorted();
  const constants = map.constants.setups;
  const { setupOf, setupIds } = setupCodes(ids, constants, file);
  const grids = setupIds.map(() =>
    Array.from({ length: subbands }, (): FoundFrequencies | undefined => undefined),
  );
  for (const one of found.frequencies) {
    const setup = setupOf?.get(one.setup) ?? 0;
    const subband = request.subbandOf?.get(one.subband) ?? 0;
    grids[setup]![subband] = one;
  }
  const numbered = found.labels.get("channel");
  const byFrequency = numbered === undefined && found.frequencies.some(({ different }) => different.size > 0);
  const size = constants?.[0]?.frequencies[0]?.length;
  const codes =
    numbered === undefined
      ? undefined
      : axisCodes(numbered.sorted(), size, map.uses.channel?.from, "channel", notes, file);
  const channels = size ?? countChannels(request, grids, codes);
  if (setupIds.length * subbands * channels > MOST_FREQUENCIES) {
    throw new InputError(
      `there would be ${setupIds.length} x ${subbands} x ${channels} channels in all setups and sub-bands: expected at ` +
        `most ${MOST_FREQUENCIES}`,
      { file },
      "A column probably holds something else than the column map says",
    );
  }
  const setups = setupIds.map((id, index) => {
    const constant = constants?.[constants.length === 1 ? 0 : index];
    const frequencies = new Float64Array(subbands * channels).fill(Number.NaN);
    for (let subband = 0; subband < subbands; subband++) {
      const row = frequencies.subarray(subband * channels, (subband + 1) * channels);
      fillSubband(row, constant?.frequencies[subband], grids[index]![subband], codes, subband, request);
    }
    return { id, frequencies, channelWidths: widthsOf(frequencies, subbands, channels, constant, request) };
  });
  const channelOf: ChannelCodes | undefined =
    codes !== undefined
      ? { by: "number", codes }
      : byFrequency
        ? { by: "frequency", codes: frequencyCodes(setups, grids, subbands, channels, file) }
        : undefined;
  noteImpossible(setups, notes);
  return { channels, channelOf, setups, setupOf };
}

function setupCodes(
  labels: readonly Label[] | undefined,
  constants: readonly SetupConstant[] | undefined,
  file: string,
): { setupOf: Map<Label, number> | undefined; setupIds: readonly number[] } {
  if (labels === undefined) {
    if (constants !== undefined && constants.length > 1) {
      throw new InputError(
        `the column map gives ${constants.length} frequency setups, and no column says which a row is of`,
        { file },
      );
    }
    return { setupOf: undefined, setupIds: [constants?.[0]?.id ?? 1] };
  }
  if (constants === undefined || constants.length === 1) {
    const setupIds = labels.map((label, i) => (typeof label === "number" ? label : i + 1));
    return { setupOf: new Map(labels.map((label, i) => [label, i])), setupIds };
  }
  const setupIds = constants.map(({ id }) => id);
  const strange = labels.find((label) => !setupIds.includes(label as number));
  if (strange !== undefined) {
    throw new InputError(
      `rows name frequency setup "${strange}", which the column map does not have: it has ${setupIds.join(", ")}`,
      { file },
    );
  }
  return { setupOf: new Map(labels.map((label) => [label, setupIds.indexOf(label as number)])), setupIds };
}

function countChannels(
  { map, found, subbandOf, subbands, file }: Request,
  grids: readonly (readonly (FoundFrequencies | undefined)[])[],
  codes: ReadonlyMap<Label, number> | undefined,
): number {
  if (codes !== undefined) return [...codes.values()].reduce((most, index) => Math.max(most, index + 1), 1);
  const sizes = new Set<number>();
  for (const one of grids.flat()) {
    if (one === undefined) continue;
    const each = one.listed === undefined ? one.different.size : one.listed.length;
    sizes.add(one.listed !== undefined && subbandOf === undefined ? each / subbands : each);
  }
  const [first, second] = [...sizes].sort((a, b) => a - b);
  if (first === undefined) {
    throw new InputError(
      "nothing tells the frequencies of the channels: neither a column nor the column map",
      { file },
      map.uses.channel === undefined && found.listLength === undefined
        ? "Say which column holds the frequency, or give constants: { frequencies: [1.4GHz] }"
        : "Give them in a column map: constants: { frequencies: { start: 1.4GHz, step: 1MHz, channels: 64 } }",
    );
  }
  if (second !== undefined || !Number.isInteger(first)) {
    throw new InputError(
      `sub-bands have from ${first} to ${[...sizes].at(-1)} different frequencies: expected the same number`,
      { file },
      "Give a column of channels, or the frequencies in the constants of a column map",
    );
  }
  return first;
}

/** Hz of one sub-band, into `out`. */
function fillSubband(
  out: Float64Array,
  constant: readonly number[] | undefined,
  found: FoundFrequencies | undefined,
  codes: ReadonlyMap<Label, number> | undefined,
  subband: number,
  { file, subbandOf }: Request,
): void {
  if (constant !== undefined) {
    if (constant.length !== out.length) {
      throw new InputError(
        `a frequency setup has ${constant.length} channels and another ${out.length}: expected the same`,
        { file },
      );
    }
    out.set(constant);
    return;
  }
  if (found?.listed !== undefined) {
    const start = subbandOf === undefined ? subband * out.length : 0;
    out.set(found.listed.slice(start, start + out.length));
  } else if (found !== undefined && codes !== undefined && found.byChannel.size > 0) {
    for (const [label, hertz] of found.byChannel) out[codes.get(label)!] = hertz;
  } else if (found !== undefined && found.different.size > 0) {
    out.set([...found.different].sort((a, b) => a - b));
  } else if (codes !== undefined && found === undefined) {
    throw new InputError(
      "channels have numbers, and nothing tells their frequencies",
      { file },
      "Give them in a column map: constants: { frequencies: { start: 1.4GHz, step: 1MHz, channels: 64 } }",
    );
  }
}

function widthsOf(
  frequencies: Float64Array,
  subbands: number,
  channels: number,
  constant: SetupConstant | undefined,
  { map, notes }: Request,
): Float64Array {
  const given = constant?.channelWidths;
  const widths = new Float64Array(subbands);
  for (let subband = 0; subband < subbands; subband++) {
    const stated = given?.[given.length === 1 ? 0 : subband] ?? map.constants.channelWidth;
    const row = frequencies.subarray(subband * channels, (subband + 1) * channels);
    widths[subband] = stated === undefined ? spacingOf(row) : Math.abs(stated);
    if (stated === undefined && channels > 1) {
      notes.note(
        "channel-width-from-spacing",
        "no channel width is given: channels are taken to be as wide as they are apart",
      );
    }
  }
  return widths;
}

/** Median distance of neighbours, Hz; NaN for one channel. */
function spacingOf(frequencies: Float64Array): number {
  const steps = Array.from(frequencies.subarray(1), (hertz, i) => Math.abs(hertz - frequencies[i]!))
    .filter((step) => step > 0)
    .sort((a, b) => a - b);
  return steps[steps.length >> 1] ?? Number.NaN;
}

/** The channel of every frequency met: itself among those found, or the nearest of those the map gives. */
function frequencyCodes(
  setups: readonly Setup[],
  grids: readonly (readonly (FoundFrequencies | undefined)[])[],
  subbands: number,
  channels: number,
  file: string,
): Map<number, number>[] {
  return setups.flatMap(({ frequencies, channelWidths }, setup) =>
    Array.from({ length: subbands }, (_, subband) => {
      const row = frequencies.subarray(subband * channels, (subband + 1) * channels);
      const codes = new Map<number, number>();
      for (const hertz of grids[setup]![subband]?.different ?? []) {
        const channel = nearestChannel(row, hertz);
        const apart = Math.abs(row[channel]! - hertz);
        if (apart > 0 && !(apart < 0.5 * channelWidths[subband]!)) {
          throw new InputError(
            `a row is at ${hertz} Hz, and no channel of the column map is within half its width of that`,
            { file },
          );
        }
        codes.set(hertz, channel);
      }
      return codes;
    }),
  );
}

function nearestChannel(row: Float64Array, hertz: number): number {
  const rising = row[row.length - 1]! >= row[0]!;
  let low = 0;
  let high = row.length - 1;
  while (low < high) {
    const middle = (low + high) >> 1;
    // The nearer neighbour of two lies this side of the point half-way.
    const half = (row[middle]! + row[middle + 1]!) / 2;
    if (rising ? hertz <= half : hertz >= half) high = middle;
    else low = middle + 1;
  }
  return low;
}

/** Above any radio or submillimetre band: 30 um. */
const HIGHEST_FREQUENCY = 1e13;

function noteImpossible(setups: readonly Setup[], notes: Notes): void {
  for (const { id, frequencies, channelWidths } of setups) {
    const bad = frequencies.find((hertz) => !(hertz > 0 && hertz <= HIGHEST_FREQUENCY));
    if (bad !== undefined) {
      const text = `frequency setup ${id} has a channel at ${bad} Hz: expected more than 0 and at most ${HIGHEST_FREQUENCY}`;
      notes.fault("impossible-frequency", text);
    }
    if (channelWidths.some((width) => !(width > 0))) {
      notes.fault("missing-channel-width", `frequency setup ${id} has no channel width`);
    }
  }
}
