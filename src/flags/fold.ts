/** Selections alike in all parts but one joined into one that takes the same samples. */
import type { Selection } from "../dataset/selection.ts";
import { canonical, keyWithout } from "./selection-algebra.ts";

const PARTS = ["channels", "baselines", "antennas", "subbands", "fields"] as const;

/** The same samples in fewer selections; those that were split out of one become that one again. */
export function foldSelections(selections: readonly Selection[]): Selection[] {
  let folded = selections.map(canonical);
  for (const part of PARTS) folded = joinBy(folded, part);
  return folded.map(canonical);
}

function joinBy(selections: readonly Selection[], part: (typeof PARTS)[number]): Selection[] {
  const groups = new Map<string, Selection[]>();
  for (const selection of selections) {
    const key = `${selection[part] === null} ${keyWithout(selection, part)}`;
    const group = groups.get(key);
    if (group === undefined) groups.set(key, [selection]);
    else group.push(selection);
  }
  return [...groups.values()].map((group) => {
    const [first] = group;
    if (group.length === 1 || first![part] === null) return first!;
    return canonical({ ...first!, [part]: group.flatMap((one) => one[part] as readonly unknown[]) });
  });
}
