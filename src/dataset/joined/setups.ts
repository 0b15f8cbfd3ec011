/** The frequency setups of several files: equal frequencies are one setup, others stand beside it. */
import { InputError } from "../../util/errors.ts";
import type { Polarization, Setup, Shape } from "../dataset.ts";

/** Share of a channel that the centres of equal channels may be apart. */
const SAME_CHANNEL = 0.01;

export class JoinedSetups {
  readonly #setups: Setup[] = [];
  readonly #ids = new Set<number>();

  /** Index in the dataset of each setup of a file; undefined where it is the index in the file. */
  add(setups: readonly Setup[]): Int32Array | undefined {
    const places = Int32Array.from(setups, (setup) => {
      const known = this.#setups.findIndex((other) => isSame(other, setup));
      return known >= 0 ? known : this.#addNew(setup);
    });
    return places.every((place, i) => place === i) ? undefined : places;
  }

  #addNew(setup: Setup): number {
    let { id } = setup;
    for (let next = 1; this.#ids.has(id); next++) id = next;
    this.#ids.add(id);
    this.#setups.push({ ...setup, id });
    return this.#setups.length - 1;
  }

  finish(): Setup[] {
    return [...this.#setups];
  }
}

function isSame(one: Setup, other: Setup): boolean {
  const channels = one.frequencies.length / one.channelWidths.length;
  const widths = one.channelWidths.every((width, s) => {
    const theirs = other.channelWidths[s]!;
    return Object.is(width, theirs) || Math.abs(width - theirs) <= SAME_CHANNEL * width;
  });
  if (!widths) return false;
  return one.frequencies.every((hertz, i) => {
    const width = one.channelWidths[Math.floor(i / channels)]!;
    // Without a width only what rounding does is forgiven.
    const tolerance = width > 0 ? SAME_CHANNEL * width : 1e-9 * Math.abs(hertz);
    return Object.is(hertz, other.frequencies[i]) || Math.abs(hertz - other.frequencies[i]!) <= tolerance;
  });
}

/** What every file of a dataset has in common. */
export interface CommonForm {
  readonly shape: Shape;
  readonly polarizations: readonly Polarization[];
  readonly unit: string;
  readonly hasWeights: boolean;
}

/** @throws InputError saying how the file differs from the first and what to do */
export function requireSameForm(first: CommonForm, firstPath: string, file: CommonForm, path: string): void {
  const differs = (what: string, found: string, expected: string, advice: string) =>
    new InputError(
      `${what} ${found}: expected ${expected}, as in ${firstPath}`,
      { file: path },
      `${advice}, or check each file on its own`,
    );
  if (file.polarizations.join(" ") !== first.polarizations.join(" ")) {
    throw differs(
      "the polarizations are",
      file.polarizations.join(" "),
      first.polarizations.join(" "),
      "Export the files with the same polarizations in the same order",
    );
  }
  const { subbands, channels } = file.shape;
  if (subbands !== first.shape.subbands || channels !== first.shape.channels) {
    throw differs(
      "a row holds",
      `${subbands} x ${channels} (sub-bands x channels)`,
      `${first.shape.subbands} x ${first.shape.channels}`,
      "Files of other frequencies join as setups where they have as many sub-bands and channels: split or average them " +
        "so that they do",
    );
  }
  if (file.unit !== first.unit) {
    throw differs(
      "the unit of the amplitudes is",
      `"${file.unit}"`,
      `"${first.unit}"`,
      "Calibrate all or none",
    );
  }
  if (file.hasWeights !== first.hasWeights) {
    throw differs(
      "a row has",
      file.hasWeights ? "weights" : "no weights",
      first.hasWeights ? "weights" : "none",
      "Weights of 1 do not compare with measured ones: export all with weights or none",
    );
  }
}
