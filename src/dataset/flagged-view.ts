/**
 * A dataset with selections flagged, without touching its file: the same blocks, the selected weights turned
 * negative.
 */
import type { BlockRequest, Dataset, SampleBlock } from "./dataset.ts";
import { type Selection, selectionAlone } from "./selection.ts";
import { compileSelections, type SelectionMatcher } from "./selection-matcher.ts";

export {
  countSelections,
  type SelectionCount,
  type SelectionCounts,
} from "./count-selections.ts";
export { compileSelections, type SelectionMatcher } from "./selection-matcher.ts";

/**
 * The dataset as it would be with the selections flagged: weight = -|weight| on every selected sample. A weight of
 * zero stays zero and one that is not finite stays as it is.
 */
export function flaggedView(dataset: Dataset, selections: readonly Selection[]): Dataset {
  if (selections.length === 0) return dataset;
  const { recipe, ...rest } = dataset;
  return {
    ...rest,
    ...(recipe === undefined
      ? {}
      : { recipe: { kind: "flagged", of: recipe, selections: selections.map(selectionAlone) } }),
    blocks: (request) => flaggedBlocks(dataset, selections, request),
  };
}

async function* flaggedBlocks(
  dataset: Dataset,
  selections: readonly Selection[],
  request: BlockRequest,
): AsyncIterable<SampleBlock> {
  const matcher = compileSelections(dataset, selections);
  const rowSamples = rowSamplesOf(dataset);
  for await (const block of dataset.blocks(request)) {
    if (request.want !== "rows") flagBlock(matcher, block, rowSamples);
    yield block;
  }
}

/** Flag in place the samples of a block that any selection takes. */
function flagBlock(matcher: SelectionMatcher, block: SampleBlock, rowSamples: number): void {
  const { weight } = block;
  const { matched, runs } = matcher;
  for (let row = 0; row < block.rows; row++) {
    const count = matcher.matchRow(block, row);
    const base = row * rowSamples;
    for (let i = 0; i < count; i++) {
      const bounds = runs[matched[i]!]!;
      for (let b = 0; b < bounds.length; b += 2) {
        const end = base + bounds[b + 1]!;
        for (let at = base + bounds[b]!; at < end; at++) {
          const value = weight[at]!;
          if (value > 0 && value < Number.POSITIVE_INFINITY) weight[at] = -value;
        }
      }
    }
  }
}

function rowSamplesOf(dataset: Dataset): number {
  const { subbands, channels, polarizations } = dataset.shape;
  return subbands * channels * polarizations;
}
