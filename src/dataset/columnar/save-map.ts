/** The column map in force, saved for its user to correct. */
import { InputError } from "../../util/errors.ts";
import type { Dataset } from "../dataset.ts";
import type { ColumnMap } from "./column-map.ts";
import { writeColumnMap } from "./map-text.ts";

/** @throws InputError when the dataset is no table, or the file is there already or cannot be written */
export async function saveColumnMap(dataset: Dataset, path: string): Promise<void> {
  if (!("columnMap" in dataset)) {
    throw new InputError(
      "this dataset has no columns to map: it is a FITS file",
      { file: dataset.files[0] ?? dataset.name },
      "Leave out --column-map",
    );
  }
  await writeColumnMap(dataset.columnMap as ColumnMap, path);
}
