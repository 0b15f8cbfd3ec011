/** What can be wrong with an image, in words of ours, and what was measured of each. */

export const SYMPTOM_WORDS = [
  "stripes",
  "rings",
  "radial-blur",
  "tangential-blur",
  "bowl",
  "ghosts",
  "noise",
] as const;
export type SymptomWord = (typeof SYMPTOM_WORDS)[number];

/** What each looks like, a clause. */
export const SYMPTOM_LOOKS: Readonly<Record<SymptomWord, string>> = {
  stripes: "parallel waves across the whole image, at one spacing and direction",
  rings: "rings or arcs around sources, most around those away from the centre",
  "radial-blur": "sources drawn out towards and away from the centre, the more the farther they are from it",
  "tangential-blur": "sources drawn out around the centre, the more the farther they are from it",
  bowl: "a negative hollow around extended emission, whose flux is too low",
  ghosts: "spots like faint copies of a source, often on opposite sides of it",
  noise: "more noise than the data should give, without a shape of its own",
};

export interface Symptom {
  readonly word: SymptomWord;
  /** whether it is there */
  readonly present: boolean;
  /** what was measured, a sentence */
  readonly text: string;
  /** the numbers in it; the unit is in the key */
  readonly measured: Readonly<Record<string, number>>;
}
