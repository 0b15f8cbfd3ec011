/** The columns of a UV_DATA table to write, and the bytes of its rows. */
import type { Dataset, SampleBlock } from "../dataset/dataset.ts";
import { MJD_EPOCH_JD } from "../util/dates.ts";
import type { RowScan } from "./fits-idi-scan.ts";
import { unfit } from "./stokes-axis.ts";

export interface UvColumn {
  readonly name: string;
  readonly form: string;
  readonly unit?: string;
}

export interface UvRowLayout {
  readonly columns: readonly UvColumn[];
  /** where the weights go: into the matrix, into column WEIGHT, or nowhere since there are none */
  readonly weights: "matrix" | "column" | "none";
  readonly matrixElements: number;
  /** the number that names a baseline */
  readonly baselineCode: (antenna1: number, antenna2: number) => number;
  /** Setup.id by index */
  readonly setupIds: readonly number[];
  /** MJD of rows without a time */
  readonly referenceDay: number;
}

/** @throws InputError when the dataset does not fit the format */
export function uvRowLayout(dataset: Dataset, scan: RowScan, referenceDay: number): UvRowLayout {
  const { subbands, channels, polarizations } = dataset.shape;
  const weights = !dataset.hasWeights ? "none" : scan.weightsByChannel ? "matrix" : "column";
  const matrixElements = (weights === "matrix" ? 3 : 2) * polarizations * channels * subbands;
  const seconds = (name: string, form = "1D") => ({ name, form, unit: "SECONDS" });
  const number = (name: string) => ({ name, form: "1J" });
  return {
    columns: [
      seconds("UU"),
      seconds("VV"),
      seconds("WW"),
      { name: "DATE", form: "1D", unit: "DAYS" },
      { name: "TIME", form: "1D", unit: "DAYS" },
      ...["BASELINE", "ARRAY", "SOURCE_ID", "FREQID"].map(number),
      seconds("INTTIM", "1E"),
      ...(weights === "column" ? [{ name: "WEIGHT", form: `${polarizations * subbands}E` }] : []),
      { name: "FLUX", form: `${matrixElements}E`, unit: fluxUnit(dataset.unit) },
    ],
    weights,
    matrixElements,
    baselineCode: baselineCodeOf(dataset),
    setupIds: dataset.setups.map(({ id }) => id),
    referenceDay,
  };
}

function fluxUnit(unit: string): string {
  if (unit === "Jy") return "JY";
  return unit === "uncalibrated" ? "UNCALIB" : unit;
}

function baselineCodeOf(dataset: Dataset): UvRowLayout["baselineCode"] {
  const most = Math.max(0, ...dataset.array.antennas.map(({ number }) => number));
  if (most > 2047) throw unfit(dataset, `antenna number ${most}`, "2047 at most");
  return most <= 255 ? (one, two) => 256 * one + two : (one, two) => 65_536 + 2048 * one + two;
}

/** Rows of a block as the table has them, big-endian. */
export function uvRowBytes(
  block: SampleBlock,
  { shape }: Pick<Dataset, "shape">,
  layout: UvRowLayout,
  rowBytes: number,
): Uint8Array {
  const view = new DataView(new ArrayBuffer(block.rows * rowBytes));
  const { subbands, channels, polarizations } = shape;
  const rowSamples = subbands * channels * polarizations;
  for (let row = 0; row < block.rows; row++) {
    let at = putRow(view, row * rowBytes, block, row, layout);
    const first = row * rowSamples;
    if (layout.weights === "column") {
      for (let subband = 0; subband < subbands; subband++) {
        for (let p = 0; p < polarizations; p++, at += 4) {
          view.setFloat32(at, block.weight[first + subband * channels * polarizations + p]!);
        }
      }
    }
    for (let i = first; i < first + rowSamples; i++) {
      view.setFloat32(at, block.real[i]!);
      view.setFloat32(at + 4, block.imag[i]!);
      at += 8;
      if (layout.weights === "matrix") {
        view.setFloat32(at, block.weight[i]!);
        at += 4;
      }
    }
  }
  return new Uint8Array(view.buffer);
}

/** The columns before the weights; gives the byte after them. */
function putRow(view: DataView, start: number, block: SampleBlock, row: number, layout: UvRowLayout): number {
  const time = block.time[row]!;
  // The day apart from its fraction, so that a Julian date costs the fraction no digits.
  const day = Number.isNaN(time) ? layout.referenceDay : Math.floor(time);
  view.setFloat64(start, block.u[row]!);
  view.setFloat64(start + 8, block.v[row]!);
  view.setFloat64(start + 16, block.w[row]!);
  view.setFloat64(start + 24, day + MJD_EPOCH_JD);
  view.setFloat64(start + 32, time - day);
  view.setInt32(start + 40, layout.baselineCode(block.antenna1[row]!, block.antenna2[row]!));
  view.setInt32(start + 44, block.subarray[row]!);
  view.setInt32(start + 48, block.field[row]!);
  view.setInt32(start + 52, layout.setupIds[block.setup[row]!]!);
  view.setFloat32(start + 56, block.integration[row]!);
  return start + 60;
}
