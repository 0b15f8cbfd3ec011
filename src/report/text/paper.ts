/**
 * Lines of a text report. Everything given to it is cleaned of what a terminal would obey, broken to the width, and
 * only then coloured, so that no name can colour, move or widen a line.
 */
import { Chalk, type ChalkInstance } from "chalk";
import type { Verdict } from "../../rules/finding.ts";
import { plainText } from "../../util/terminal.ts";
import type { DataTable } from "../tables.ts";
import { displayWidth, pad, wrap } from "./width.ts";

export type Ink = (text: string) => string;

export interface Inks {
  readonly heading: Ink;
  readonly strong: Ink;
  readonly faint: Ink;
  readonly plain: Ink;
  readonly verdict: Readonly<Record<Verdict, Ink>>;
}

/** A column of text: at most this many columns a line, or what is left when undefined. */
export interface TextColumn {
  readonly head: string;
  readonly numeric: boolean;
  readonly ink?: Ink;
}

/** Prose wider than this is hard to read, however wide the terminal. */
const PROSE = 100;
const NARROWEST = 40;
const GAP = 2;

export class Paper {
  readonly width: number;
  readonly ink: Inks;
  readonly #lines: string[] = [];

  constructor(options: { readonly width: number; readonly colour: boolean }) {
    const width = Number.isFinite(options.width) ? Math.floor(options.width) : 80;
    this.width = Math.max(NARROWEST, width);
    this.ink = inks(new Chalk({ level: options.colour ? 1 : 0 }));
  }

  get text(): string {
    return `${this.#lines.join("\n").trimEnd()}\n`;
  }

  gap(): void {
    if (this.#lines.length > 0 && this.#lines.at(-1) !== "") this.#lines.push("");
  }

  heading(text: string): void {
    this.gap();
    this.#write(text, 0, this.width, this.ink.heading);
  }

  prose(text: string, indent = 2, ink: Ink = this.ink.plain): void {
    this.#write(text, indent, Math.min(this.width, PROSE + indent), ink);
  }

  /** One of a list: the lines after the first stand under its text, not under its mark. */
  bullet(text: string, indent = 2): void {
    const lines = wrap(plainText(text), Math.min(this.width, PROSE + indent) - indent - 2);
    for (const [i, line] of lines.entries())
      this.#lines.push(`${" ".repeat(indent)}${i === 0 ? "- " : "  "}${line}`);
  }

  /** A label and its text beside it, the text in a column of its own. */
  entry(label: string, text: string, options: { indent?: number; labelWidth: number; ink?: Ink }): void {
    const indent = options.indent ?? 2;
    const room = Math.min(this.width, PROSE + indent + options.labelWidth) - indent - options.labelWidth;
    const lines = wrap(plainText(text), room);
    const margin = " ".repeat(indent);
    const name = this.ink.faint(pad(plainText(label), options.labelWidth));
    const ink = options.ink ?? this.ink.plain;
    for (const [i, line] of lines.entries()) {
      this.#lines.push(`${margin}${i === 0 ? name : " ".repeat(options.labelWidth)}${ink(line)}`);
    }
  }

  /**
   * A table with its heads; the widest columns are broken to fit. A row may hold one cell more than there are columns:
   * it goes on lines of its own below, from the second column on.
   */
  table(columns: readonly TextColumn[], rows: readonly (readonly string[])[], indent = 2): void {
    const clean = rows.map((row) => row.map((cell) => plainText(cell)));
    const widths = this.#fit(columns, clean, this.width - indent);
    const margin = " ".repeat(indent);
    const below = indent + widths[0]! + GAP;
    const line = (cells: readonly string[], inkOf: (column: TextColumn) => Ink) => {
      const wrapped = columns.map((_, c) => wrap(cells[c] ?? "", widths[c]!));
      const height = Math.max(...wrapped.map((part) => part.length));
      for (let i = 0; i < height; i++) {
        const parts = columns.map((column, c) => {
          const text = wrapped[c]?.[i] ?? "";
          const last = c === columns.length - 1 && !column.numeric;
          return inkOf(column)(last ? text : pad(text, widths[c]!, column.numeric ? "right" : "left"));
        });
        this.#lines.push((margin + parts.join(" ".repeat(GAP))).trimEnd());
      }
    };
    line(
      columns.map((column) => column.head),
      () => this.ink.faint,
    );
    for (const row of clean) {
      line(row, (column) => column.ink ?? this.ink.plain);
      const extra = row[columns.length];
      if (extra !== undefined) this.prose(extra, below, this.ink.faint);
    }
  }

  dataTable(data: DataTable): void {
    this.gap();
    this.prose(data.caption, 2, this.ink.strong);
    this.table(data.columns, data.rows, 4);
    if (data.note !== undefined) this.prose(data.note, 4, this.ink.faint);
  }

  #write(text: string, indent: number, width: number, ink: Ink): void {
    const margin = " ".repeat(indent);
    for (const line of wrap(plainText(text), width - indent)) this.#lines.push(margin + ink(line));
  }

  /** Widths of the columns: as wide as their cells where all fit, else the widest gives way first. */
  #fit(columns: readonly TextColumn[], rows: readonly (readonly string[])[], room: number): number[] {
    const widths = columns.map((column, c) =>
      Math.max(2, displayWidth(column.head), ...rows.map((row) => displayWidth(row[c] ?? ""))),
    );
    const free = room - GAP * (columns.length - 1);
    let excess = widths.reduce((sum, width) => sum + width, 0) - free;
    while (excess > 0) {
      const widest = Math.max(...widths);
      if (widest <= 2) break;
      const second = Math.max(2, ...widths.filter((width) => width < widest));
      const among = widths.filter((width) => width === widest).length;
      const step = Math.max(1, Math.min(widest - second, Math.floor(excess / among)));
      for (let c = 0; c < widths.length && excess > 0; c++) {
        if (widths[c] !== widest) continue;
        widths[c] = widest - Math.min(step, excess);
        excess -= widest - widths[c]!;
      }
    }
    return widths;
  }
}

function inks(chalk: ChalkInstance): Inks {
  return {
    heading: chalk.bold.cyan,
    strong: chalk.bold,
    faint: chalk.dim,
    plain: (text) => text,
    verdict: { ready: chalk.bold.green, caution: chalk.bold.yellow, hold: chalk.bold.red },
  };
}
