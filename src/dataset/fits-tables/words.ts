/** What the formats of FITS visibilities call one thing each, for messages. */
export interface Words {
  /** "group" of random groups, "row" of a table */
  readonly row: string;
  readonly rows: string;
  /** what the axes are axes of */
  readonly array: string;
  /** such as "antenna table (AN)" */
  readonly antennaTable: string;
  readonly frequencyTable: string;
  readonly sourceTable: string;
  readonly flagTable: string;
  /** the frequency table's short name */
  readonly setupTable: string;
  /** such as "IF axis" */
  readonly subbandAxis: string;
  /** such as "SOURCE parameter" */
  readonly sourceColumn: string;
  /** names of the numbers in rows */
  readonly source: string;
  readonly setup: string;
  readonly subarray: string;
}
