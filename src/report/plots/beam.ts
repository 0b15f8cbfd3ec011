/** The dirty beam's middle as a picture: what each point source in the image will look like before deconvolution. */
import { axisX, axisY, contour, type RenderFunction } from "@observablehq/plot";
import { encode } from "fast-png";
import type { Beam, BeamPicture } from "../../imaging/image.ts";
import { formatPercent } from "../../util/units.ts";
import { formatArcsec } from "../quantity.ts";
import { drawChart, SQUARE } from "./chart.ts";
import { picture } from "./marks.ts";
import { node } from "./node.ts";
import { quantileOf } from "./quantile.ts";
import { angleUnit, roundBelow } from "./ticks.ts";

export interface BeamChart {
  readonly svg: string;
  /** the fraction of the peak at which the shades are full */
  readonly full: number;
}

/** Pixels a side, at most: more is bytes that the page cannot show. */
const MOST_PIXELS = 301;

/** Okabe & Ito 2008, Color Universal Design: vermillion and blue. */
const POSITIVE = [213, 94, 0] as const;
const NEGATIVE = [0, 114, 178] as const;

export function beamChart(beam: BeamPicture, fitted: Beam | undefined): BeamChart {
  const shown = middleOf(beam);
  const full = fullShade(shown);
  const reach = (shown.size / 2) * shown.cellArcsec;
  const { divisor, name } = angleUnit(reach);
  const limit = reach / divisor;
  const range = { x: [limit, -limit], y: [-limit, limit] } as const;
  const svg = drawChart({
    id: "beam",
    label: `dirty beam, ${shown.size} by ${shown.size} cells of ${formatArcsec(shown.cellArcsec)}`,
    height: SQUARE,
    // East is to the left, as on the sky.
    x: { domain: [limit, -limit], label: null },
    y: { domain: [-limit, limit], label: null },
    marks: [
      axisX({ ticks: 5, label: `east (${name})`, labelArrow: "none" }),
      axisY({ ticks: 5, label: `north (${name})`, labelArrow: "none" }),
      picture(`data:image/png;base64,${Buffer.from(beamPng(shown, full)).toString("base64")}`, range),
      contour(Array.from(shown.pixels), {
        width: shown.size,
        height: shown.size,
        x1: limit,
        x2: -limit,
        y1: -limit,
        y2: limit,
        thresholds: [0.5],
        stroke: "var(--ink)",
        strokeWidth: 1.5,
        clip: true,
      }),
      furniture(fitted, { divisor, name, limit }),
    ],
  });
  return { svg, full };
}

/** The middle of a large picture: an odd number of pixels around the peak. */
function middleOf(beam: BeamPicture): BeamPicture {
  if (beam.size <= MOST_PIXELS) return beam;
  const cut = (beam.size - MOST_PIXELS) >> 1;
  const pixels = new Float32Array(MOST_PIXELS * MOST_PIXELS);
  for (let row = 0; row < MOST_PIXELS; row++) {
    const from = (row + cut) * beam.size + cut;
    pixels.set(beam.pixels.subarray(from, from + MOST_PIXELS), row * MOST_PIXELS);
  }
  return { ...beam, size: MOST_PIXELS, pixels };
}

/** Shades are full where the sidelobes are largest, not at the peak: the sidelobes are what the picture is for. */
function fullShade(beam: BeamPicture): number {
  const sizes = Array.from(beam.pixels, Math.abs)
    .filter((value) => Number.isFinite(value))
    .sort((a, b) => a - b);
  const strong = quantileOf(sizes, 0.985, 1);
  return Math.min(1, Math.max(0.02, roundBelow(Math.max(strong, 1e-6) * 1.25)));
}

/** Colour by sign and opacity by size: zero is the page's own ground, light or dark. Row 0 of the PNG is north. */
function beamPng(beam: BeamPicture, full: number): Uint8Array {
  const { size, pixels } = beam;
  const data = new Uint8Array(size * size * 4);
  for (let row = 0; row < size; row++) {
    for (let column = 0; column < size; column++) {
      const value = pixels[(size - 1 - row) * size + column]!;
      const shade = Number.isFinite(value) ? Math.min(1, Math.abs(value) / full) : 0;
      const at = (row * size + column) * 4;
      // 32 shades: the eye tells no more apart, and the picture packs four times smaller.
      data.set(value < 0 ? NEGATIVE : POSITIVE, at);
      data[at + 3] = Math.round((Math.round(shade * 32) / 32) * 255);
    }
  }
  return encode({ width: size, height: size, data, channels: 4, depth: 8 });
}

/** The fitted beam as an ellipse in the corner, the largest sidelobe's place, and a bar of a round length. */
function furniture(
  fitted: Beam | undefined,
  axis: { divisor: number; name: string; limit: number },
): RenderFunction {
  return (_index, scales, _values, _dimensions, context) => {
    const { document } = context;
    const x = scales.x as (value: number) => number;
    const y = scales.y as (value: number) => number;
    const group = node(document, "g", {});
    const perUnit = Math.abs(x(1) - x(0));
    const [left, bottom] = [x(axis.limit), y(-axis.limit)];
    const length = roundBelow((axis.limit * 2) / 4);
    const bar = length * perUnit;
    const right = x(-axis.limit);
    group.appendChild(
      node(document, "path", {
        d: `M${right - 14 - bar} ${bottom - 16}h${bar}`,
        stroke: "var(--ink)",
        "stroke-width": 2.5,
      }),
    );
    group.appendChild(
      node(
        document,
        "text",
        { x: right - 14 - bar / 2, y: bottom - 22, class: "halo" },
        `${Number(length.toPrecision(3))} ${axis.name}`,
      ),
    );
    if (fitted === undefined) return group;
    const major = (fitted.majorArcsec / axis.divisor) * perUnit;
    const minor = (fitted.minorArcsec / axis.divisor) * perUnit;
    if (Number.isFinite(major) && Number.isFinite(minor)) {
      const angle = Number.isFinite(fitted.positionAngleDeg) ? fitted.positionAngleDeg : 0;
      const [cx, cy] = [left + 14 + major / 2, bottom - 14 - major / 2];
      group.appendChild(
        node(document, "ellipse", {
          cx,
          cy,
          rx: minor / 2,
          ry: major / 2,
          // From north through east is anticlockwise where east is left.
          transform: `rotate(${-angle} ${cx} ${cy})`,
          fill: "var(--ink)",
          "fill-opacity": 0.25,
          stroke: "var(--ink)",
          "stroke-width": 1.5,
        }),
      );
    }
    const east = fitted.peakSidelobeEastArcsec / axis.divisor;
    const north = fitted.peakSidelobeNorthArcsec / axis.divisor;
    if (Math.abs(east) < axis.limit && Math.abs(north) < axis.limit) {
      const sign = fitted.peakSidelobeFraction < 0 ? "-" : "";
      group.appendChild(
        node(document, "circle", {
          cx: x(east),
          cy: y(north),
          r: 9,
          fill: "none",
          stroke: "var(--ink)",
          "stroke-width": 2,
        }),
      );
      group.appendChild(
        node(
          document,
          "text",
          { x: x(east), y: y(north) + 24, class: "halo" },
          `${sign}${formatPercent(Math.abs(fitted.peakSidelobeFraction))}`,
        ),
      );
    }
    return group;
  };
}
