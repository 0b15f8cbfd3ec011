/** Tables and facts as every report shows them: words and numbers ready to print, hostile names not yet escaped. */

export interface Fact {
  readonly label: string;
  readonly value: string;
}

export interface DataTable {
  readonly caption: string;
  /** the first column names the row */
  readonly columns: readonly { readonly head: string; readonly numeric: boolean }[];
  readonly rows: readonly (readonly string[])[];
  /** what to know when reading it, sentences */
  readonly note?: string;
}

export const words = (head: string) => ({ head, numeric: false });
export const numbers = (head: string) => ({ head, numeric: true });
