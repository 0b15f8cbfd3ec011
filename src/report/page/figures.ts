/** The plots, each with what it shows, a key to its colours, and its content in words for who cannot see it. */
import { formatCount, formatNumber, formatPercent } from "../../util/units.ts";
import { weightingLabel } from "../numbers.ts";
import { amplitudeChart } from "../plots/amplitude.ts";
import { beamChart } from "../plots/beam.ts";
import { type Cells, classifyCells } from "../plots/cells.ts";
import {
  type ChannelShare,
  channelShares,
  flaggedByAntennaChart,
  flaggedByChannelChart,
  shares,
} from "../plots/flagged.ts";
import { phaseChart, phaseSubjects } from "../plots/phase.ts";
import { isTaken, spectrumChart, spectrumOf } from "../plots/spectrum.ts";
import { hasAzimuthalGap, hasRadialGap, uvCoverageChart } from "../plots/uv-coverage.ts";
import { largestAllowedW, wDistanceChart } from "../plots/w-distance.ts";
import { formatArcsec, formatWavelengths } from "../quantity.ts";
import type { Check } from "../report.ts";
import type { ScopeWords } from "../scope.ts";
import { html, Markup } from "./markup.ts";
import { section } from "./parts.ts";

export type Key = readonly [shape: "" | "area" | "dot" | "hatch" | "line", colour: string, text: string];

const KEPT: Key = ["dot", "kept", "usable"];
const SUGGESTED: Key = ["dot", "suggested", "mostly taken by suggested flags"];
const FLAGGED: Key = ["dot", "flagged", "flagged already"];
const GAPS: Key = ["area", "limit", "largest gaps in radius and direction"];
const BARS: readonly Key[] = [
  ["", "flagged", "flagged already"],
  ["", "bad", "not finite or exactly zero"],
  ["hatch", "suggested", "suggested for flagging"],
];

export function figuresSection(check: Check, words: ScopeWords): Markup {
  if (check.survey.tracks.cells === 0) {
    return section(
      "plots",
      "The data in plots",
      html`<p>There is nothing to plot: no cross-correlation has a sample.</p>`,
    );
  }
  const cells = classifyCells(check);
  const channels = channelShares(check, cells);
  const suggested = check.flags.length > 0 ? [SUGGESTED] : [];
  const { before } = check.image.coverage;
  const gaps = hasRadialGap(before) || hasAzimuthalGap(before) ? [GAPS] : [];
  const figures = [
    figure("uv-coverage", "uv coverage", uvCoverageChart(check, cells), uvText(check), [
      KEPT,
      ...suggested,
      FLAGGED,
      ...gaps,
    ]),
    beamFigure(check),
    figure("amplitude", "Amplitude against uv distance", amplitudeChart(check, cells), amplitudeText(check), [
      KEPT,
      ...suggested,
    ]),
    figure("w-distance", "|w| against uv distance", wDistanceChart(check, cells), wText(check), [
      KEPT,
      ...suggested,
      FLAGGED,
      ["line", "limit", "what the field allows without correction"],
    ]),
    spectrumFigure(check, channels),
    figure(
      "flagged-antenna",
      "Flagged samples by antenna",
      flaggedByAntennaChart(check, cells, words),
      antennaText(cells, words) + absentText(check, cells),
      BARS,
    ),
    channelFigure(check, channels),
    ...phaseFigures(check, words),
  ];
  return section("plots", "The data in plots", html`<div class="plots">${figures}</div>`);
}

export function figure(
  id: string,
  title: string,
  svg: string,
  text: string,
  keys: readonly Key[],
  extra?: Markup,
): Markup {
  const legend = keys.map(
    ([shape, colour, name]) =>
      html`<li><span class="key ${shape}" style="--key:var(--${colour})" aria-hidden="true"></span>${name}</li>`,
  );
  return html`<figure aria-labelledby="${id}-title"><h3 id="${id}-title">${title}</h3>
${new Markup(svg)}
${keys.length > 0 && html`<ul class="legend">${legend}</ul>`}${extra}
<figcaption>${text}</figcaption></figure>
`;
}

function beamFigure(check: Check): Markup | undefined {
  const { beamPicture } = check;
  if (beamPicture === null) return undefined;
  const result =
    check.image.weightings.find((candidate) => weightingLabel(candidate) === beamPicture.weighting) ??
    check.image.weightings.find((candidate) => candidate.weighting === beamPicture.weighting) ??
    check.image.weightings.find((candidate) => candidate.planned);
  const { svg, full } = beamChart(beamPicture, result?.before);
  const scale = formatPercent(full);
  const ramp = html`<p class="ramp"><span>-${scale} or less</span><span class="colours" aria-hidden="true"></span><span>+${scale} or more</span></p>`;
  const lobes =
    result === undefined
      ? ""
      : ` Main lobe ${formatArcsec(result.before.majorArcsec)} by ${formatArcsec(result.before.minorArcsec)}, ` +
        `drawn in the corner; the largest sidelobe, ${formatPercent(Math.abs(result.before.peakSidelobeFraction))} of the peak, is ringed.`;
  const text =
    `The response to a point source before deconvolution, ${beamPicture.weighting} weighting, the data as they are. ` +
    `Colours are fractions of the peak; the line is half of it.${lobes}`;
  return figure("beam", "Dirty beam", svg, text, [], ramp);
}

function channelFigure(check: Check, channels: readonly ChannelShare[]): Markup | undefined {
  if (channels.length < 2) return undefined;
  return figure(
    "flagged-channel",
    "Flagged samples by channel",
    flaggedByChannelChart(check, channels),
    channelText(check, channels),
    [["", "flagged", "flagged already, not finite or zero"], BARS[2]!],
  );
}

/** A channel this many times the median one is worth a word; no source, a matter of reading. */
const STANDS_OUT = 1.1;

function spectrumFigure(check: Check, channels: readonly ChannelShare[]): Markup | undefined {
  const spectrum = spectrumOf(check);
  if (spectrum === null) return undefined;
  const { channels: each } = check.dataset.shape;
  const top = spectrum.loudest;
  const loudest =
    top === null || top.ratio < STANDS_OUT
      ? ""
      : ` The loudest is channel ${top.channel % each} of sub-band ${Math.floor(top.channel / each)}, ${formatNumber(top.ratio)} times the median channel.`;
  const text = `Median amplitude of each channel on the median baseline, and on the baseline that only a tenth exceed.${loudest}`;
  const shaded: Key[] = channels.some(isTaken)
    ? [["hatch", "suggested", "channels suggested for flagging"]]
    : [];
  return figure("spectrum", "Amplitude against channel", spectrumChart(check, spectrum, channels), text, [
    ["dot", "kept", "median baseline"],
    ["dot", "limit", "baseline exceeded by a tenth"],
    ...shaded,
  ]);
}

function uvText(check: Check): string {
  const { coverage } = check.image;
  const { before, after } = coverage;
  const filled = `${formatPercent(before.filledFraction)} of the cells of 1/field are filled`;
  const then = after === null ? "" : `, ${formatPercent(after.filledFraction)} with the suggested flags`;
  return (
    `Every baseline and its conjugate, from the lowest to the highest frequency. Spacings from ` +
    `${formatWavelengths(before.shortestSpacingWavelengths)} to ${formatWavelengths(before.longestSpacingWavelengths)}; ${filled}${then}.`
  );
}

function amplitudeText(check: Check): string {
  const unit = check.dataset.unit === "Jy" ? "" : " Amplitudes are not calibrated.";
  return `Mean amplitude of each baseline, integration and sub-band, parallel hands; where points are many, darker is denser.${unit}`;
}

function wText(check: Check): string {
  const { wTerm } = check.image;
  const allowed = largestAllowedW(check);
  const limit = `The planned field keeps its edge within ${formatNumber((wTerm.phaseLimitRad * 180) / Math.PI)} deg up to |w| of ${formatWavelengths(allowed)}`;
  const corrected = check.plan.correctsW.value ? "; the imager corrects what is beyond" : "";
  const known = wTerm.known
    ? `|w| reaches ${formatWavelengths(wTerm.largestWavelengths)}.`
    : "w is not known in this dataset.";
  return `At the highest frequency. ${known} ${limit}${corrected}.`;
}

function antennaText(cells: Cells, words: ScopeWords): string {
  const parts = [...cells.antennas].map(([antenna, fate]) => ({ antenna, ...shares(fate) }));
  const worst = parts
    .map((part) => ({ ...part, lost: part.flagged + part.bad }))
    .sort((a, b) => b.lost - a.lost || a.antenna - b.antenna)
    .slice(0, 3);
  const taken = parts
    .filter((part) => part.suggested > 0.005)
    .sort((a, b) => b.suggested - a.suggested || a.antenna - b.antenna)
    .slice(0, 3);
  const say = (list: readonly { antenna: number; share: number }[]) =>
    list.map(({ antenna, share }) => `${words.antenna(antenna)} ${formatPercent(share)}`).join(", ");
  const lost =
    (worst[0]?.lost ?? 0) > 0
      ? `Most lost already: ${say(worst.map(({ antenna, lost: share }) => ({ antenna, share })))}.`
      : "No sample of any antenna is lost already.";
  if (taken.length === 0) return lost;
  return `${lost} Most taken by the suggested flags: ${say(taken.map(({ antenna, suggested: share }) => ({ antenna, share })))}.`;
}

function absentText(check: Check, cells: Cells): string {
  const absent = check.dataset.polarizations.filter((_, i) => cells.present[i] === false);
  if (absent.length === 0) return "";
  return ` ${absent.join(" and ")} ${absent.length === 1 ? "has" : "have"} no usable sample: absent, and not counted here.`;
}

function channelText(check: Check, all: readonly ChannelShare[]): string {
  const { channels } = check.dataset.shape;
  const gone = all.filter((share) => share.flagged > 0.995).length;
  const most = all
    .map((share, channel) => ({ ...share, channel }))
    .sort((a, b) => b.suggested - a.suggested || a.channel - b.channel)[0];
  const taken =
    most === undefined || most.suggested < 0.005
      ? ""
      : ` The suggested flags take most of channel ${most.channel % channels} of sub-band ${Math.floor(most.channel / channels)}: ${formatPercent(most.suggested)}.`;
  return `${formatCount(gone)} of ${formatCount(all.length)} channels have no usable sample.${taken}`;
}

function phaseFigures(check: Check, words: ScopeWords): Markup[] {
  return phaseSubjects(check, words).map((subject) => {
    const events = subject.events.map((event) => event.evidence).slice(0, 3);
    const whose =
      subject.antenna === null ? "" : ` Every row has the sign of ${words.antenna(subject.antenna)}.`;
    const text =
      events.length === 0
        ? "No event in phase was found; these baselines show theirs best."
        : `${events.join(" ")}${whose}`;
    const keys: Key[] = events.length === 0 ? [] : [["", "suggested", "time of the event, and its size"]];
    return figure(
      subject.id,
      `Phase against time, ${subject.name}`,
      phaseChart(check, subject, words),
      text,
      keys,
    );
  });
}
