/** The numbers behind the verdict: beams, noise, w, smearing, coverage and counts, as tables. */
import type { Beam, Coverage, ImageForecast, WeightingResult } from "../imaging/image.ts";
import { baselinesMet, type Totals } from "../measure/survey-result.ts";
import { antennaLabels } from "../rules/scope.ts";
import {
  formatCount,
  formatDuration,
  formatFlux,
  formatFrequency,
  formatLength,
  formatNumber,
  formatPercent,
} from "../util/units.ts";
import { formatArcsec, formatWavelengths } from "./quantity.ts";
import type { Check } from "./report.ts";
import { type DataTable, numbers, words } from "./tables.ts";

export function numberTables(check: Check): DataTable[] {
  const { image, survey } = check;
  return [
    beamTable(image),
    coverageTable(image),
    wTable(check),
    smearingTable(image),
    countTable(survey.totals, check),
  ];
}

export function weightingLabel(result: WeightingResult): string {
  return result.robust === null ? result.weighting : `${result.weighting}(${result.robust})`;
}

function beamTable(image: ImageForecast): DataTable {
  const row = (label: string, beam: Beam) => [
    label,
    beamSize(beam),
    Number.isFinite(beam.positionAngleDeg) ? `${formatNumber(beam.positionAngleDeg)} deg` : "unknown",
    formatSigned(beam.peakSidelobeFraction),
    formatPercent(beam.rmsSidelobeFraction),
    formatFlux(beam.noiseJy),
  ];
  const planned = image.weightings.find((result) => result.planned);
  return {
    caption: "Dirty beam and noise by weighting",
    columns: [
      words("Weighting"),
      numbers("Main lobe"),
      numbers("Angle"),
      numbers("Sidelobe"),
      numbers("Rms"),
      numbers("Noise"),
    ],
    rows: image.weightings.flatMap((result) => {
      const label = weightingLabel(result);
      const before = row(label, result.before);
      return result.after === null ? [before] : [before, row("  after flags", result.after)];
    }),
    note:
      `${planned === undefined ? "" : `The plan takes ${weightingLabel(planned)}. `}` +
      "Main lobe: full width at half maximum of the fitted Gaussian, and its position angle from north through east. " +
      "Sidelobe: the largest inside the field, and the rms, of the peak. Noise: thermal, of the image.",
  };
}

/** `10.1 x 8.18 arcsec`, both axes in one unit. */
function beamSize(beam: Beam): string {
  if (!Number.isFinite(beam.majorArcsec) || !Number.isFinite(beam.minorArcsec)) return "unknown";
  const major = formatArcsec(beam.majorArcsec);
  const unit = major.slice(major.indexOf(" ") + 1);
  const scale = Number(major.slice(0, major.indexOf(" "))) / beam.majorArcsec;
  return `${formatNumber(beam.majorArcsec * scale)} x ${formatNumber(beam.minorArcsec * scale)} ${unit}`;
}

function formatSigned(fraction: number): string {
  return fraction < 0 ? `-${formatPercent(-fraction)}` : formatPercent(fraction);
}

const COVERAGE_ROWS: readonly (readonly [string, (coverage: Coverage) => string])[] = [
  ["cells of 1/field filled", (c) => formatPercent(c.filledFraction)],
  ["largest radial gap", (c) => gapText(c.radialGapFromWavelengths, c.radialGapToWavelengths)],
  [
    "widest gap in direction",
    (c) => (c.largestAzimuthalGapRad === 0 ? "none" : formatDegrees(c.largestAzimuthalGapRad)),
  ],
  ["  centred on", (c) => (c.largestAzimuthalGapRad === 0 ? "none" : formatDegrees(c.azimuthalGapAtRad))],
  ["  in the annulus", (c) => gapText(c.azimuthalGapFromWavelengths, c.azimuthalGapToWavelengths)],
  ["shortest spacing", (c) => formatWavelengths(c.shortestSpacingWavelengths)],
  ["longest spacing", (c) => formatWavelengths(c.longestSpacingWavelengths)],
  ["flux missed at the largest scale", (c) => formatPercent(c.missingFluxFraction)],
];

function coverageTable(image: ImageForecast): DataTable {
  const { before, after } = image.coverage;
  return {
    caption: "uv coverage between the plan's scales",
    columns: [
      words("Coverage"),
      numbers("As it is"),
      ...(after === null ? [] : [numbers("After the flags")]),
    ],
    rows: COVERAGE_ROWS.map(([label, text]) => [
      label,
      text(before),
      ...(after === null ? [] : [text(after)]),
    ]),
  };
}

function gapText(from: number, to: number): string {
  if (!Number.isFinite(from) || !Number.isFinite(to)) return "none";
  return to > from ? `${formatWavelengths(from)} to ${formatWavelengths(to)}` : "none";
}

/** A direction or an opening angle, not an angle on the sky: degrees whatever its size. */
function formatDegrees(radians: number): string {
  return Number.isFinite(radians) ? `${formatNumber((radians * 180) / Math.PI)} deg` : "unknown";
}

function wTable(check: Check): DataTable {
  const { wTerm } = check.image;
  const caption = "w term at the edge of the field";
  const columns = [words("w term"), numbers("Value")];
  if (!wTerm.known) {
    return {
      caption,
      columns,
      rows: [["largest |w|", "unknown"]],
      note: "w is zero or missing in the file and the antenna positions do not give it: this is no statement that w is small.",
    };
  }
  return {
    caption,
    columns,
    rows: [
      ["largest |w|", formatWavelengths(wTerm.largestWavelengths)],
      ["phase that it leaves at the edge", formatDegrees(wTerm.edgePhaseRad)],
      ["peak that a source at the edge loses", formatPercent(wTerm.edgeLossFraction)],
      [
        `field that needs no correction, at ${formatDegrees(wTerm.phaseLimitRad)}`,
        formatArcsec(wTerm.uncorrectedFieldArcsec),
      ],
      [
        "planes, or facets, that a correction needs",
        wTerm.planes <= 1 ? "none" : `${formatCount(wTerm.planes)}, or ${formatCount(wTerm.facets)}`,
      ],
      ...planeRows(check),
    ],
  };
}

/** Heights below this are the roundness of the Earth and the lie of the land, metres. */
const LEAST_HEIGHT = 1;

/** The antenna that stands furthest off the plane of the others, and where that plane faces. */
function planeRows({ measures, dataset }: Check): string[][] {
  const geometry = measures.get("geometry")?.table.object() as
    | Readonly<Record<string, number | string | null>>
    | undefined;
  if (geometry === undefined) return [];
  const { ridge_antenna, ridge_height_m, coplanar_hour_angle_deg, coplanar_declination_deg } = geometry;
  const rows: string[][] = [];
  const height = Number(ridge_height_m);
  if (ridge_antenna !== null && Math.abs(height) >= LEAST_HEIGHT) {
    const label = antennaLabels(dataset.array.antennas)(Number(ridge_antenna));
    const side = height > 0 ? "above" : "below";
    rows.push([
      "furthest off the plane of the others",
      `${label}, ${formatLength(Math.abs(height))} ${side}`,
    ]);
  }
  const [hourAngle, declination] = [Number(coplanar_hour_angle_deg), Number(coplanar_declination_deg)];
  if (Number.isFinite(hourAngle) && Number.isFinite(declination)) {
    // Positions from the Earth's centre have their x axis in the meridian of Greenwich.
    const from = dataset.array.frame === "geocentric" ? "Greenwich hour angle" : "hour angle";
    rows.push([
      `plane of the array faces (${from}, declination)`,
      `${formatNumber(hourAngle)}, ${formatNumber(declination)} deg`,
    ]);
  }
  return rows;
}

function smearingTable(image: ImageForecast): DataTable {
  const { smearing } = image;
  const safe = formatPercent(smearing.safeLossFraction);
  return {
    caption: "Smearing at the edge of the field",
    columns: [words("Smearing"), numbers("Value")],
    rows: [
      ["peak lost to the channel width", formatPercent(smearing.bandwidthLossFraction)],
      ["peak lost to the integration time", formatPercent(smearing.timeLossFraction)],
      [`channel that loses ${safe}`, formatFrequency(smearing.safeChannelHz)],
      [`integration that loses ${safe}`, formatDuration(smearing.safeIntegrationSeconds)],
    ],
  };
}

function countTable(totals: Totals, check: Check): DataTable {
  const share = (count: number) => (totals.samples > 0 ? formatPercent(count / totals.samples) : "unknown");
  const row = (label: string, count: number) => [label, formatCount(count), share(count)];
  const { dataset, survey } = check;
  const plain = (label: string, count: number) => [label, formatCount(count), ""];
  return {
    caption: "Counts",
    columns: [words("Counted"), numbers("Count"), numbers("Share")],
    rows: [
      row("samples of cross-correlations", totals.samples),
      row("  usable", totals.usable),
      row("  flagged already", totals.flagged),
      row("  not finite", totals.bad),
      row("  exactly zero, so not measured", totals.zero),
      plain("rows of cross-correlations", totals.rows),
      plain("rows of autocorrelations, left out", totals.autocorrelationRows),
      plain("rows that repeat another", totals.duplicateRows),
      plain("rows earlier than the one before", totals.outOfOrderRows),
      plain("rows without a time", totals.badTimeRows),
      plain("rows without u, v, w", totals.badUvwRows),
      plain("integrations", survey.times.length),
      plain("antennas with data", survey.antennasWithData.length),
      plain("baselines", baselinesMet(survey)),
      plain("channels of all sub-bands", dataset.shape.subbands * dataset.shape.channels),
    ],
  };
}
