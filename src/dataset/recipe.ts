/**
 * How a dataset was opened, as plain data that structured cloning copies: another thread or process opens the same
 * dataset from it without looking at the rows again.
 */
import type { Dataset } from "./dataset.ts";
import { type FieldRuns, fieldRowsView } from "./field-view.ts";
import { flaggedView } from "./flagged-view.ts";
import { openFiles } from "./open.ts";
import type { RowSummary } from "./row-summary.ts";
import type { Selection } from "./selection.ts";

/** What the user may say about an input besides its name. */
export interface OpenOptions {
  /** path of a YAML file that says what the columns of tables are */
  readonly columnMap?: string | undefined;
}

/** What the rows of the files hold: one summary a FITS file, or one for all columnar files together. */
export type KnownRows = readonly RowSummary[];

export type DatasetRecipe =
  | {
      readonly kind: "files";
      /** every file, in the order of its rows in the dataset; no folder and no glob */
      readonly paths: readonly string[];
      readonly options: OpenOptions;
      readonly known: KnownRows;
    }
  | {
      readonly kind: "field";
      readonly of: DatasetRecipe;
      /** Field.id */
      readonly id: number;
      readonly runs: FieldRuns;
    }
  | {
      readonly kind: "flagged";
      readonly of: DatasetRecipe;
      readonly selections: readonly Selection[];
    };

/**
 * The dataset that the recipe was taken from: the same rows in the same order.
 *
 * @throws InputError where a file has gone or changed
 */
export async function reopen(recipe: DatasetRecipe): Promise<Dataset> {
  switch (recipe.kind) {
    case "files":
      return openFiles(recipe.paths, recipe.options, recipe.known);
    case "field":
      return fieldRowsView(await reopen(recipe.of), recipe.id, recipe.runs);
    case "flagged":
      return flaggedView(await reopen(recipe.of), recipe.selections);
  }
}
