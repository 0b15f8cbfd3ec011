/** What FITS-IDI calls its parts. */
import type { Words } from "../fits-tables/words.ts";

export const WORDS: Words = {
  row: "row",
  rows: "rows",
  array: "matrix",
  antennaTable: "antenna table (ARRAY_GEOMETRY)",
  frequencyTable: "frequency table (FREQUENCY)",
  sourceTable: "source table (SOURCE)",
  flagTable: "flag table (FLAG)",
  setupTable: "FREQUENCY table",
  subbandAxis: "BAND axis",
  sourceColumn: "SOURCE_ID column",
  source: "SOURCE_ID",
  setup: "FREQID",
  subarray: "ARRAY",
};
