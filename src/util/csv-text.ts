/** CSV by RFC 4180, with lines that end in LF. Numbers read back as the same double. */
import type { ColumnTable } from "./column-table.ts";

/** An empty cell is missing (null), "" in quotes an empty text, NaN an unknown number. */
export function csvText({ rows, columns }: ColumnTable): string {
  const lines = [columns.map(({ name }) => textCell(name)).join(",")];
  for (let row = 0; row < rows; row++) {
    lines.push(columns.map(({ values }) => cell(values[row] ?? null)).join(","));
  }
  return `${lines.join("\n")}\n`;
}

function cell(value: number | string | null): string {
  if (value === null) return "";
  return typeof value === "number" ? numberCell(value) : textCell(value);
}

function numberCell(value: number): string {
  if (Number.isFinite(value)) return String(value);
  if (Number.isNaN(value)) return "NaN";
  return value > 0 ? "inf" : "-inf";
}

function textCell(text: string): string {
  return text === "" || /[",\r\n]|^\s|\s$/.test(text) ? `"${text.replaceAll('"', '""')}"` : text;
}
