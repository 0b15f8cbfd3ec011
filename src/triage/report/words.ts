/** Sentences and rows that text and page have in common. */
import { formatArcsec, formatWavelengths } from "../../report/quantity.ts";
import { type DataTable, numbers, words } from "../../report/tables.ts";
import { isoFromMjd } from "../../util/dates.ts";
import {
  formatAngle,
  formatCount,
  formatDeclination,
  formatPercent,
  formatRightAscension,
} from "../../util/units.ts";
import { SYMPTOM_LOOKS } from "../symptoms/symptom.ts";
import type { Triage } from "../triage.ts";
import { tracksOnOutliers } from "../uv/cells.ts";

export interface Fact {
  readonly label: string;
  readonly value: string;
}

const ARCSECONDS = (180 / Math.PI) * 3600;

/** What was looked at. */
export function triageFacts(triage: Triage): Fact[] {
  const { image, symptom, dataset } = triage;
  const data = { label: "Dataset", value: dataset.name };
  if (image === null) {
    return [data, { label: "Symptom", value: `${symptom}: ${SYMPTOM_LOOKS[symptom!]}` }];
  }
  const { seen } = image;
  const { sky, size } = seen.image;
  const { beam } = seen;
  const sources = seen.sources.length;
  return [
    data,
    { label: "Image", value: seen.image.file },
    {
      label: "Pixels",
      value: `${size[0]} x ${size[1]} of ${formatAngle(seen.frame.cell)}, ${sky.projection} projection`,
    },
    {
      label: "Centre",
      value: `${formatRightAscension(sky.rightAscension)} ${formatDeclination(sky.declination)} (${sky.equinox})`,
    },
    {
      label: "Main lobe",
      value: `${formatArcsec(beam.major * ARCSECONDS)} by ${formatArcsec(beam.minor * ARCSECONDS)}`,
    },
    {
      label: "Looks",
      value: seen.deconvolved
        ? "deconvolved: its sources have no sidelobes to speak of"
        : `not deconvolved: its sources have ${formatPercent(Math.min(1, Math.max(0, seen.sidelobes)))} of their sidelobes (${seen.weighting.kind} weighting fits best)`,
    },
    {
      label: "Sources",
      value: `${formatCount(sources)} ${sources === 1 ? "is" : "are"} taken out before anything is measured`,
    },
  ];
}

export function symptomTable({ image }: Triage): DataTable | null {
  if (image === null) return null;
  return {
    caption: "Symptoms, measured on what the sources leave",
    columns: [words("Symptom"), words("There"), words("Measured")],
    rows: image.symptoms.map(({ word, present, text }) => [word, present ? "yes" : "no", text]),
  };
}

/** Baselines in the list of those with samples on cells out of family. */
const MOST_TRACKS = 6;

/** null where no cell of the uv plane is out of family. */
export function trackTable({ image, words: names }: Triage): DataTable | null {
  if (image === null || image.cells.outliers.length === 0) return null;
  const { seen, cells } = image;
  const { survey } = seen.sampling;
  const tracks = tracksOnOutliers(seen, cells).slice(0, MOST_TRACKS);
  if (tracks.length === 0) return null;
  return {
    caption: "Baselines with samples where the uv plane is out of family",
    columns: [words("Baseline"), numbers("Power there"), words("From"), words("To")],
    rows: tracks.map(({ baseline, share, first, last }) => {
      const { antenna1, antenna2 } = survey.baselines[baseline]!;
      return [
        names.baseline(antenna1, antenna2),
        formatPercent(share),
        isoFromMjd(seen.atoms.bins.start[first]!).replace("T", " "),
        isoFromMjd(seen.atoms.bins.end[last]!).replace("T", " "),
      ];
    }),
    note: `${formatCount(cells.outliers.length)} cells of one over the image's width hold more than noise would in one of 1000 images, the strongest at ${formatWavelengths(strongestSpacing(triageCells(seen, cells)))}. Tracks cross: that a baseline has samples there does not make it the cause.`,
  };
}

function triageCells(
  { frame, image }: NonNullable<Triage["image"]>["seen"],
  cells: NonNullable<Triage["image"]>["cells"],
): { fx: number; fy: number; matrix: readonly number[] } {
  const [cell] = cells.outliers;
  return {
    fx: ((cell! % cells.columns) - (cells.columns >> 1)) / image.width,
    fy: Math.floor(cell! / cells.columns) / image.height,
    matrix: frame.matrix,
  };
}

function strongestSpacing({ fx, fy, matrix }: ReturnType<typeof triageCells>): number {
  const [a, b, c, d] = matrix as [number, number, number, number];
  const determinant = a * d - b * c;
  return Math.hypot((d * fx - c * fy) / determinant, (-b * fx + a * fy) / determinant);
}

/** `97 % of what is wrong`, or how far its finding goes where there is no image. */
export function weightText(cause: Triage["causes"][number]): string {
  if (Number.isFinite(cause.share)) return `${formatPercent(cause.share)} of what is wrong beyond noise`;
  return `severity ${cause.severity.toFixed(2)} of 1 in the data`;
}
