/** What was looked at: the array, the times, the fields and the frequencies, in a few lines. */
import type { Dataset } from "../dataset/dataset.ts";
import { baselinesMet, type Survey } from "../measure/survey-result.ts";
import { isoFromMjd } from "../util/dates.ts";
import {
  formatBytes,
  formatCount,
  formatDeclination,
  formatDuration,
  formatFrequency,
  formatRightAscension,
} from "../util/units.ts";
import type { Fact } from "./tables.ts";

const FORMAT_NAME: Readonly<Record<Dataset["format"], string>> = {
  "random-groups": "random-groups FITS",
  "fits-idi": "FITS-IDI",
  columnar: "columnar tables",
  simulated: "simulated",
};

/** Fields named in full; the rest is counted. */
const MOST_FIELDS = 4;

export function datasetFacts(survey: Survey): Fact[] {
  const { dataset } = survey;
  const facts: Fact[] = [
    { label: "Array", value: arrayText(survey) },
    { label: "Time", value: timeText(survey) },
    { label: dataset.fields.length === 1 ? "Field" : "Fields", value: fieldsText(dataset) },
    { label: "Frequency", value: frequencyText(dataset) },
    { label: "Products", value: dataset.polarizations.join(" ") },
    {
      label: "File",
      value: `${FORMAT_NAME[dataset.format]}, ${formatBytes(dataset.bytes)}, ${formatCount(dataset.rows)} rows`,
    },
  ];
  return facts;
}

function arrayText(survey: Survey): string {
  const { array } = survey.dataset;
  const all = array.antennas.length;
  const used = survey.antennasWithData.length;
  const name = array.name.trim() === "" ? "unnamed" : array.name.trim();
  const data = used === all ? "all with data" : `${used} with data`;
  return `${name}, ${formatCount(all)} antennas (${data}), ${formatCount(baselinesMet(survey))} baselines`;
}

function timeText(survey: Survey): string {
  const { times } = survey;
  if (times.length === 0) return "no integration with a time";
  const start = times[0]!;
  const end = times[times.length - 1]!;
  const from = isoFromMjd(start).replace("T", " ");
  const to = isoFromMjd(end).replace("T", " ");
  const sameDay = from.slice(0, 10) === to.slice(0, 10);
  const count = `${formatCount(times.length)} integrations of ${formatDuration(survey.integration)}`;
  const scans = survey.scans.length;
  return `${from} to ${sameDay ? to.slice(11) : to} UTC, ${count}, ${scans} ${scans === 1 ? "scan" : "scans"}`;
}

function fieldsText(dataset: Dataset): string {
  const texts = dataset.fields.slice(0, MOST_FIELDS).map((field) => {
    const name = field.name.trim() === "" ? `field ${field.id}` : field.name.trim();
    if (!Number.isFinite(field.rightAscension) || !Number.isFinite(field.declination))
      return `${name}, no position`;
    const equinox = field.equinox === 2000 ? " J2000" : field.equinox === 1950 ? " B1950" : "";
    return `${name} at ${formatRightAscension(field.rightAscension, 1)} ${formatDeclination(field.declination, 0)}${equinox}`;
  });
  const rest = dataset.fields.length - texts.length;
  return texts.join("; ") + (rest > 0 ? `; and ${formatCount(rest)} more` : "");
}

function frequencyText(dataset: Dataset): string {
  const { subbands, channels } = dataset.shape;
  const shape = `${subbands} ${subbands === 1 ? "sub-band" : "sub-bands"} of ${formatCount(channels)} ${channels === 1 ? "channel" : "channels"}`;
  const [low, high] = frequencyRange(dataset);
  if (!(low <= high)) return shape;
  const widths = [...new Set(dataset.setups.flatMap((setup) => [...setup.channelWidths]))].sort(
    (a, b) => a - b,
  );
  const width = widths.length === 1 ? ` of ${formatFrequency(widths[0]!)}` : "";
  const range =
    low === high ? formatFrequency(low, 7) : `${formatFrequency(low, 5)} to ${formatFrequency(high, 5)}`;
  return `${range}, ${shape}${width}`;
}

/** Lowest and highest channel centre of all setups, Hz; Infinity and -Infinity when there is none. */
export function frequencyRange(dataset: Dataset): [number, number] {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const { frequencies } of dataset.setups) {
    for (const frequency of frequencies) {
      if (frequency < low) low = frequency;
      if (frequency > high) high = frequency;
    }
  }
  return [low, high];
}
