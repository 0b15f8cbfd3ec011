/** What random groups call their parts. */
import type { Words } from "../fits-tables/words.ts";

export const WORDS: Words = {
  row: "group",
  rows: "groups",
  array: "group",
  antennaTable: "antenna table (AN)",
  frequencyTable: "frequency table (FQ)",
  sourceTable: "source table (SU)",
  flagTable: "flag table (FG)",
  setupTable: "FQ table",
  subbandAxis: "IF axis",
  sourceColumn: "SOURCE parameter",
  source: "SOURCE",
  setup: "FREQSEL",
  subarray: "SUBARRAY",
};
