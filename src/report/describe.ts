/** What is in a dataset, as text of 80 columns: array, times, fields, frequencies, sizes, notes. No judging. */

import type { Dataset, Field, Setup } from "../dataset/dataset.ts";
import type { RowSummary } from "../dataset/row-summary.ts";
import { SECONDS_PER_DAY, SPEED_OF_LIGHT } from "../util/constants.ts";
import { dateFromMjd, isoFromMjd, mjdFromDate } from "../util/dates.ts";
import { plainText } from "../util/terminal.ts";
import {
  formatBytes,
  formatCount,
  formatDeclination,
  formatDuration,
  formatFrequency,
  formatLength,
  formatRightAscension,
} from "../util/units.ts";
import { pad, wrap } from "./text/width.ts";

export interface DescribeExtras {
  /** what the rows hold */
  readonly summary: RowSummary;
}

const WIDTH = 80;
const LABEL = 15;
/** Shown in full; the rest is counted. */
const MOST_FIELDS = 20;
const MOST_SUBBANDS = 16;
const MOST_ANTENNAS = 100;

const FORMAT_NAMES: Readonly<Record<Dataset["format"], string>> = {
  "random-groups": "random-groups FITS",
  "fits-idi": "FITS-IDI",
  columnar: "columnar tables",
  simulated: "simulated",
};

/** Text that ends in a line end. Names from the file are stripped of everything a terminal would obey. */
export function describeText(dataset: Dataset, { summary }: DescribeExtras): string {
  const lines = [
    ...wrap(plainText(dataset.name), WIDTH),
    ...entry("Format", [FORMAT_NAMES[dataset.format]]),
    ...entry("Observed", headerLines(dataset)),
    ...entry("Array", arrayLines(dataset, summary)),
    ...entry("Antennas", [antennaNames(dataset, new Set(summary.antennas))]),
    ...entry("Times", timeLines(summary)),
    ...entry(dataset.fields.length === 1 ? "Field" : "Fields", fieldLines(dataset.fields, summary)),
    ...entry("Frequencies", frequencyLines(dataset, summary)),
    ...entry("Polarizations", [dataset.polarizations.join(" ")]),
    ...entry("Spacings", [spacingText(summary)]),
    ...entry("Size", sizeLines(dataset, summary)),
    ...noteLines(dataset),
  ];
  return `${lines.join("\n")}\n`;
}

/** A label and its lines beside it, each broken to the width; nothing where there are none. */
function entry(label: string, texts: readonly string[]): string[] {
  const lines = texts.flatMap((text) => wrap(plainText(text), WIDTH - LABEL));
  return lines.map((line, i) => (i === 0 ? pad(label, LABEL) : " ".repeat(LABEL)) + unbound(line));
}

/** Keeps a number and what it belongs to on one line; `unbound` makes a blank of it. */
const BOUND = "\u00a0";

function unbound(line: string): string {
  return line.replaceAll(BOUND, " ");
}

function headerLines({ header }: Dataset): string[] {
  const { telescope, instrument, observed, observer } = header;
  const day = mjdFromDate(observed ?? "");
  const parts = [
    telescope,
    instrument === telescope ? undefined : instrument,
    observed === undefined || Number.isNaN(day) ? observed : dateFromMjd(day),
    observer === undefined ? undefined : `by ${observer}`,
  ].filter((part) => part !== undefined);
  return parts.length === 0 ? [] : [parts.join(", ")];
}

const FRAME_TEXT = {
  geocentric: "geocentric positions",
  local: "local positions (longitude unknown)",
  unknown: "no positions",
} as const;

function arrayLines({ array }: Dataset, summary: RowSummary): string[] {
  const name = array.name.trim() === "" ? "no name" : array.name.trim();
  const withData = array.antennas.filter(({ number }) => summary.antennas.includes(number)).length;
  const all = array.antennas.length;
  const antennas = `${counted(all, "antenna")}${withData === all ? "" : `, ${formatCount(withData)} of them with data`}`;
  const lines = [name, `${antennas}; ${counted(summary.baselines, "baseline")}; ${FRAME_TEXT[array.frame]}`];
  if (summary.subarrays.length > 1) lines.push(`sub-arrays ${summary.subarrays.slice(0, 20).join(", ")}`);
  if (summary.autocorrelations > 0) lines.push(counted(summary.autocorrelations, "autocorrelation row"));
  const diameters = array.antennas.flatMap(({ diameter }) => (diameter === null ? [] : [diameter]));
  if (diameters.length > 0) {
    const [least, most] = [Math.min(...diameters), Math.max(...diameters)];
    const range = least === most ? formatLength(least) : `${formatLength(least)} to ${formatLength(most)}`;
    lines.push(`diameter ${range}`);
  }
  return lines;
}

/** Numbers and names; those without a row in brackets. */
function antennaNames({ array }: Dataset, withData: ReadonlySet<number>): string {
  const shown = array.antennas.slice(0, MOST_ANTENNAS).map(({ number, name }) => {
    const text = name === String(number) ? name : `${number}${BOUND}${name}`;
    return withData.has(number) ? text : `(${text})`;
  });
  const more = array.antennas.length - shown.length;
  const brackets = shown.some((text) => text.startsWith("(")) ? "; in brackets: no data" : "";
  return `${shown.join(", ")}${more > 0 ? ` and ${formatCount(more)} more` : ""}${brackets}`;
}

function timeLines(summary: RowSummary): string[] {
  const { firstTime, lastTime, times, rowsWithoutTime, shortestIntegration, longestIntegration } = summary;
  const clock = (mjd: number) => isoFromMjd(mjd).replace("T", " ");
  const lines = Number.isNaN(firstTime)
    ? ["no time is finite"]
    : [
        firstTime === lastTime
          ? `${clock(firstTime)} UTC`
          : `${clock(firstTime)} to ${clock(lastTime)} UTC (${formatDuration((lastTime - firstTime) * SECONDS_PER_DAY)})`,
        counted(times, "integration centre"),
      ];
  if (rowsWithoutTime > 0) lines.push(`${counted(rowsWithoutTime, "row")} without a time`);
  if (Number.isNaN(shortestIntegration)) lines.push("integration time not stated");
  else {
    const shortest = formatDuration(shortestIntegration);
    const longest = formatDuration(longestIntegration);
    lines.push(`integration time ${shortest}${shortest === longest ? "" : ` to ${longest}`}`);
  }
  return lines;
}

function fieldLines(fields: readonly Field[], summary: RowSummary): string[] {
  const rows = new Map(summary.fields.map(({ id, rows }) => [id, rows]));
  const lines = fields.slice(0, MOST_FIELDS).map((field) => {
    const { id, name, rightAscension, declination, equinox } = field;
    const place = `RA ${formatRightAscension(rightAscension)} Dec ${formatDeclination(declination)}`;
    return `${id} ${name.trim()}: ${place}${equinoxText(equinox)}, ${counted(rows.get(id) ?? 0, "row")}`;
  });
  if (fields.length > MOST_FIELDS) lines.push(`and ${formatCount(fields.length - MOST_FIELDS)} more`);
  return lines;
}

function equinoxText(equinox: number): string {
  if (Number.isNaN(equinox)) return " (equinox unknown)";
  return ` (${equinox < 1984 ? "B" : "J"}${equinox})`;
}

function frequencyLines(dataset: Dataset, summary: RowSummary): string[] {
  const { subbands, channels } = dataset.shape;
  const several = dataset.setups.length > 1;
  const rows = new Map(summary.setups.map(({ index, rows }) => [index, rows]));
  const lines = [`${counted(subbands, "sub-band")} of ${counted(channels, "channel")}`];
  dataset.setups.slice(0, MOST_SUBBANDS).forEach((setup, index) => {
    if (several) lines.push(`setup ${setup.id}, ${counted(rows.get(index) ?? 0, "row")}:`);
    const most = Math.max(1, Math.floor(MOST_SUBBANDS / dataset.setups.length));
    for (let subband = 0; subband < Math.min(subbands, most); subband++) {
      lines.push(`${several ? "  " : ""}${subbandText(setup, subband, subbands, channels)}`);
    }
    if (subbands > most) lines.push(`${several ? "  " : ""}and ${counted(subbands - most, "more sub-band")}`);
  });
  const more = dataset.setups.length - MOST_SUBBANDS;
  if (more > 0) lines.push(`and ${counted(more, "more setup")}`);
  return lines;
}

function subbandText(setup: Setup, subband: number, subbands: number, channels: number): string {
  const first = setup.frequencies[subband * channels]!;
  const last = setup.frequencies[(subband + 1) * channels - 1]!;
  const name = subbands === 1 ? "" : `${subband}: `;
  const width = setup.channelWidths[subband]!;
  const wide = Number.isNaN(width) ? "of unknown width" : `${formatFrequency(width)} wide`;
  if (channels === 1) return `${name}${formatFrequency(first, 8)}, ${wide}`;
  return `${name}${formatFrequency(first, 8)} to ${formatFrequency(last, 8)}, channels ${wide}`;
}

function spacingText({ shortestSpacing, longestSpacing, rowsWithoutUvw, wAllZero }: RowSummary): string {
  if (Number.isNaN(longestSpacing)) return "no baseline between different antennas";
  const range = `${formatLength(shortestSpacing * SPEED_OF_LIGHT)} to ${formatLength(longestSpacing * SPEED_OF_LIGHT)} across the sky`;
  const bad = rowsWithoutUvw > 0 ? `; ${counted(rowsWithoutUvw, "row")} without u, v, w` : "";
  return `${range}${wAllZero ? "; every w is 0" : ""}${bad}`;
}

function sizeLines(dataset: Dataset, { rows }: RowSummary): string[] {
  const { subbands, channels, polarizations } = dataset.shape;
  const perRow = subbands * channels * polarizations;
  const unit = dataset.unit === "uncalibrated" ? "uncalibrated amplitudes" : `amplitudes in ${dataset.unit}`;
  return [
    `${formatBytes(dataset.bytes)} on disk`,
    `${counted(rows, "row")} of ${counted(perRow, "sample")}: ${formatCount(rows * perRow)} in all`,
    `${unit}, ${dataset.hasWeights ? "with weights" : "without weights"}`,
  ];
}

function noteLines({ notes }: Dataset): string[] {
  if (notes.length === 0) return [];
  const lines = notes.flatMap(({ kind, text }) => {
    const mark = kind === "fault" ? "! " : "- ";
    return wrap(plainText(text), WIDTH - mark.length).map(
      (line, i) => (i === 0 ? mark : "  ") + unbound(line),
    );
  });
  const faults = notes.some(({ kind }) => kind === "fault")
    ? " (!: the format allows it, science does not)"
    : "";
  return ["", `Notes${faults}`, ...lines];
}

function counted(count: number, noun: string): string {
  return `${formatCount(count)}${BOUND}${noun}${count === 1 ? "" : "s"}`;
}
