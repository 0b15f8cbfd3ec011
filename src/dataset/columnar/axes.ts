/** From what a table holds to the axes of a dataset: which sub-band, channel and polarization a cell belongs to. */
import { InputError } from "../../util/errors.ts";
import { POLARIZATIONS, type Polarization, type Setup, type Shape } from "../dataset.ts";
import type { Notes } from "../notes.ts";
import { axisCodes } from "./axis-codes.ts";
import type { Axis, ColumnMap } from "./column-map.ts";
import type { FoundLabels } from "./find-labels.ts";
import { type ChannelCodes, resolveFrequencies } from "./frequencies.ts";
import type { Label } from "./labels.ts";

/** Samples of a row. */
const MOST_SAMPLES = 1 << 24;

export interface ResolvedAxes {
  readonly shape: Shape;
  readonly polarizations: readonly Polarization[];
  readonly setups: readonly Setup[];
  readonly subbandOf: ReadonlyMap<Label, number> | undefined;
  readonly channelOf: ChannelCodes | undefined;
  readonly polarizationOf: ReadonlyMap<Label, number> | undefined;
  readonly setupOf: ReadonlyMap<Label, number> | undefined;
  /** (elements of a list) sample of each, from the first that its row's columns name; [0] without lists */
  readonly offsets: Int32Array;
}

/** Axes that no column of their own runs along. */
export function axesWithoutColumn({ uses }: ColumnMap, listedFrequency: boolean): Axis[] {
  const axes: Axis[] = [];
  if (uses.subband === undefined) axes.push("subband");
  if (uses.channel === undefined && (uses.frequency === undefined || listedFrequency)) axes.push("channel");
  if (uses.polarization === undefined) axes.push("polarization");
  return axes;
}

/** @throws InputError where sizes do not go together, or nothing tells them */
export function resolveAxes(map: ColumnMap, found: FoundLabels, notes: Notes, file: string): ResolvedAxes {
  const { constants, lists } = map;
  const { labels, listLength } = found;
  const sizes = new Map<Axis, number>();
  const pols = resolvePolarizations(map, labels.get("polarization")?.sorted(), file);
  if (pols.names !== undefined) sizes.set("polarization", pols.names.length);
  const [setup] = constants.setups ?? [];
  const listed = found.frequencies.find((one) => one.listed !== undefined)?.listed;
  const subbands = labels.get("subband");
  const subbandSize = setup?.frequencies.length;
  const subbandOf =
    subbands === undefined
      ? undefined
      : axisCodes(subbands.sorted(), subbandSize, map.uses.subband?.from, "sub-band", notes, file);
  if (subbandOf !== undefined) sizes.set("subband", subbandSize ?? subbandOf.size);
  else if (subbandSize !== undefined) sizes.set("subband", subbandSize);
  if (setup !== undefined) sizes.set("channel", setup.frequencies[0]!.length);
  else if (listed !== undefined) {
    sizes.set("channel", listed.length / (subbandOf === undefined ? (sizes.get("subband") ?? 1) : 1));
  }
  if (listLength !== undefined) inferSize(lists, sizes, listLength, file);
  if (subbandOf === undefined && !sizes.has("subband")) sizes.set("subband", 1);
  const resolved = resolveFrequencies({
    map,
    found,
    subbandOf,
    subbands: sizes.get("subband")!,
    notes,
    file,
  });
  const shape: Shape = {
    subbands: sizes.get("subband")!,
    channels: resolved.channels,
    polarizations: sizes.get("polarization") ?? 1,
  };
  refuseHuge(shape, file);
  if (pols.names === undefined) throw noPolarization(file, shape.polarizations);
  requireColumnsOrLists(map, shape, resolved.channelOf, file);
  return {
    shape,
    polarizations: pols.names,
    setups: resolved.setups,
    setupOf: resolved.setupOf,
    subbandOf,
    channelOf: resolved.channelOf,
    polarizationOf: pols.codes,
    offsets: listOffsets(lists, shape, listLength, file),
  };
}

function resolvePolarizations(
  { constants, uses }: ColumnMap,
  labels: readonly Label[] | undefined,
  file: string,
): { names: readonly Polarization[] | undefined; codes: ReadonlyMap<Label, number> | undefined } {
  const given = constants.polarizations;
  if (labels === undefined) return { names: given, codes: undefined };
  const met = labels.map(
    (label) => [label, polarizationNamed(label, uses.polarization!.column, file)] as const,
  );
  const order = given ?? POLARIZATIONS.filter((name) => met.some(([, other]) => other === name));
  const codes = new Map<Label, number>();
  for (const [label, name] of met) {
    const index = order.indexOf(name);
    if (index < 0) {
      throw new InputError(
        `column "${uses.polarization!.column}" holds ${name}, which the polarizations of the column map do not`,
        { file },
        `They are ${order.join(", ")}`,
      );
    }
    codes.set(label, index);
  }
  return { names: order, codes };
}

/** A FITS name, or a number of the STOKES axis (FITS Standard 4.0, table 29). */
function polarizationNamed(label: Label, column: string, file: string): Polarization {
  const word = String(label).trim().toUpperCase();
  const code = typeof label === "number" ? label : Number.NaN;
  const byCode = code >= 1 && code <= 4 ? code - 1 : code <= -1 && code >= -8 ? 3 - code : -1;
  const name = POLARIZATIONS[byCode] ?? POLARIZATIONS.find((known) => known === word);
  if (name !== undefined) return name;
  throw new InputError(
    `column "${column}" holds "${String(label).slice(0, 40)}", which is no polarization`,
    { file },
    `Polarizations are ${POLARIZATIONS.join(" ")}`,
  );
}

/** The one size that is not known, from the length of a list. */
function inferSize(lists: readonly Axis[], sizes: Map<Axis, number>, length: number, file: string): void {
  const unknown = lists.filter((axis) => !sizes.has(axis));
  const known = lists.reduce((product, axis) => product * (sizes.get(axis) ?? 1), 1);
  const [first, second] = unknown;
  if (first === undefined) {
    if (known === length) return;
    throw new InputError(
      `the lists have ${length} elements: expected ${known}, of ${lists.map((axis) => `${sizes.get(axis)} ${axis}s`).join(" x ")}`,
      { file },
    );
  }
  if (second !== undefined || length % known !== 0 || length === 0) {
    throw new InputError(
      `the lists have ${length} elements along ${lists.join(" x ")}, and nothing tells how many of each`,
      { file },
      "Give polarizations and frequencies in the constants of a column map",
    );
  }
  sizes.set(first, length / known);
}

function requireColumnsOrLists(
  { lists }: ColumnMap,
  shape: Shape,
  channelOf: ChannelCodes | undefined,
  file: string,
): void {
  if (shape.channels === 1 || channelOf !== undefined || lists.includes("channel")) return;
  throw new InputError(
    `there are ${shape.channels} channels and no column that says which a row is of`,
    { file },
    "Say which column holds the channel or the frequency, in a column map",
  );
}

function refuseHuge({ subbands, channels, polarizations }: Shape, file: string): void {
  const samples = subbands * channels * polarizations;
  if (samples <= MOST_SAMPLES) return;
  throw new InputError(
    `a row would have ${subbands} x ${channels} x ${polarizations} samples: expected at most ${MOST_SAMPLES}`,
    { file },
    "A column probably holds something else than the column map says",
  );
}

function noPolarization(file: string, size: number): InputError {
  return new InputError(
    `nothing tells the polarization${size === 1 ? "" : "s"}`,
    { file },
    `Give ${size === 1 ? "it" : "them"} in a column map: constants: { polarizations: [RR, LL] }`,
  );
}

function listOffsets(
  lists: readonly Axis[],
  shape: Shape,
  length: number | undefined,
  file: string,
): Int32Array {
  if (lists.length === 0) return new Int32Array(1);
  const sizeOf: Readonly<Record<Axis, number>> = {
    subband: shape.subbands,
    channel: shape.channels,
    polarization: shape.polarizations,
  };
  const stride: Readonly<Record<Axis, number>> = {
    subband: shape.channels * shape.polarizations,
    channel: shape.polarizations,
    polarization: 1,
  };
  let offsets = [0];
  for (const axis of lists) {
    const next: number[] = [];
    for (const offset of offsets) {
      for (let i = 0; i < sizeOf[axis]; i++) next.push(offset + i * stride[axis]);
    }
    offsets = next;
  }
  if (length !== undefined && offsets.length !== length) {
    throw new InputError(
      `the lists have ${length} elements: expected ${offsets.length}, of ${lists.map((axis) => `${sizeOf[axis]} ${axis}s`).join(" x ")}`,
      { file },
    );
  }
  return Int32Array.from(offsets);
}
