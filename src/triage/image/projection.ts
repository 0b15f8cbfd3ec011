/**
 * The celestial axes of an image: from pixels to direction cosines about the image's reference point, and to the sky.
 * @see Calabretta & Greisen 2002, A&A 395, 1077 (SIN: section 5.1.5; CROTA: section 6.1)
 */
import type { Header } from "../../dataset/fits/header.ts";

const DEGREE = Math.PI / 180;

/** Zenithal projections by their code: sine of the angle from the reference point, given the radius in the plane. */
const SINE_OF_RADIUS: Readonly<Record<string, (radius: number) => number>> = {
  SIN: (radius) => radius,
  TAN: (radius) => Math.sin(Math.atan(radius)),
  ARC: (radius) => Math.sin(radius),
  STG: (radius) => Math.sin(2 * Math.atan(radius / 2)),
  ZEA: (radius) => Math.sin(2 * Math.asin(Math.min(1, radius / 2))),
};

/** Another zenithal projection is read as SIN where that moves no pixel by more than this, pixels. */
const MOST_SHIFT = 0.25;

export interface SkyAxes {
  /** of the first and the second celestial axis, from 0; the first is right ascension */
  readonly axes: readonly [number, number];
  /** right ascension and declination of the reference point, radians */
  readonly rightAscension: number;
  readonly declination: number;
  /** pixel of the reference point on the two axes, from 0 */
  readonly reference: readonly [number, number];
  /** direction cosines a pixel: l = a dx + b dy, m = c dx + d dy, dx along the first celestial axis */
  readonly matrix: readonly [a: number, b: number, c: number, d: number];
  /** year of the equinox; NaN unknown */
  readonly equinox: number;
  /** three letters */
  readonly projection: string;
}

/** @throws InputError where the image has no two celestial axes, or a projection that cannot be read as SIN */
export function skyAxes(header: Header, lengths: readonly number[]): SkyAxes {
  const [ra, dec] = celestialAxes(header, lengths.length);
  const projection = projectionOf(header, ra);
  refuseTurnedPole(header, ra, dec);
  const crval = (axis: number) => (header.number(`CRVAL${axis + 1}`) ?? Number.NaN) * unitOf(header, axis);
  const [rightAscension, declination] = [crval(ra), crval(dec)];
  if (!(Number.isFinite(rightAscension) && Math.abs(declination) <= Math.PI / 2)) {
    throw header.error(
      `CRVAL${ra + 1}, CRVAL${dec + 1} are no place on the sky`,
      `CRVAL${ra + 1}`,
      "Give the image its coordinates back",
    );
  }
  const reference = [ra, dec].map((axis) => (header.number(`CRPIX${axis + 1}`) ?? 1) - 1);
  const axes: SkyAxes = {
    axes: [ra, dec],
    rightAscension,
    declination,
    reference: [reference[0]!, reference[1]!],
    matrix: pixelMatrix(header, ra, dec),
    equinox: equinoxOf(header),
    projection,
  };
  refuseBentPixels(header, axes, [lengths[ra]!, lengths[dec]!]);
  return axes;
}

/** Right ascension and declination of direction cosines about a place. */
export function placeOf(
  centre: Pick<SkyAxes, "rightAscension" | "declination">,
  l: number,
  m: number,
): { readonly rightAscension: number; readonly declination: number } {
  const n = Math.sqrt(Math.max(0, 1 - l * l - m * m));
  const { declination: d } = centre;
  const east = Math.atan2(l, n * Math.cos(d) - m * Math.sin(d));
  const turn = 2 * Math.PI;
  return {
    rightAscension: (((centre.rightAscension + east) % turn) + turn) % turn,
    declination: Math.asin(Math.max(-1, Math.min(1, m * Math.cos(d) + n * Math.sin(d)))),
  };
}

function celestialAxes(header: Header, count: number): [number, number] {
  let ra = -1;
  let dec = -1;
  for (let axis = 0; axis < count; axis++) {
    const type = (header.shown(`CTYPE${axis + 1}`) ?? "").trim().toUpperCase();
    if (ra < 0 && /^RA(-|$)/.test(type)) ra = axis;
    if (dec < 0 && /^DEC(-|$)/.test(type)) dec = axis;
  }
  if (ra >= 0 && dec >= 0) return [ra, dec];
  const types = Array.from({ length: Math.min(count, 6) }, (_, i) => header.shown(`CTYPE${i + 1}`) ?? "none");
  throw header.error(
    `no axes of right ascension and declination: CTYPE is ${types.join(", ")}`,
    undefined,
    "Give an image of the sky in equatorial coordinates, such as RA---SIN and DEC--SIN",
  );
}

function projectionOf(header: Header, ra: number): string {
  const type = (header.shown(`CTYPE${ra + 1}`) ?? "").trim().toUpperCase();
  const code = type.slice(5).replaceAll("-", "");
  // Without a code the axes are linear: what small images of old were written with.
  if (code === "") return "SIN";
  if (SINE_OF_RADIUS[code] !== undefined) return code;
  throw header.error(
    `CTYPE${ra + 1} is ${type}: expected one of the projections ${Object.keys(SINE_OF_RADIUS).join(", ")}`,
    `CTYPE${ra + 1}`,
    "Make the image in the SIN projection, the one that an interferometer sees the sky in",
  );
}

/** Slanted and turned projections are rare and would put every source in a wrong place if read as plain ones. */
function refuseTurnedPole(header: Header, ra: number, dec: number): void {
  const pole = header.number("LONPOLE");
  const usual = (header.number(`CRVAL${dec + 1}`) ?? 0) >= 90 ? 0 : 180;
  if (pole !== undefined && Math.abs(pole - usual) > 1e-6) {
    throw header.error(
      `LONPOLE is ${pole}: expected ${usual}`,
      "LONPOLE",
      "Make the image with north as usual",
    );
  }
  for (const axis of [ra, dec]) {
    for (const term of [1, 2]) {
      const keyword = `PV${axis + 1}_${term}`;
      const value = axis === dec ? (header.number(keyword) ?? 0) : 0;
      if (Math.abs(value) <= 1e-12) continue;
      throw header.error(
        `${keyword} is ${value}: a slanted projection is not read`,
        keyword,
        "Make the image in the plain SIN projection",
      );
    }
  }
}

/** Degrees unless CUNIT says otherwise. */
function unitOf(header: Header, axis: number): number {
  const unit = (header.shown(`CUNIT${axis + 1}`) ?? "deg").trim().toLowerCase();
  const known: Readonly<Record<string, number>> = {
    "": DEGREE,
    deg: DEGREE,
    degree: DEGREE,
    degrees: DEGREE,
    arcmin: DEGREE / 60,
    arcsec: DEGREE / 3600,
    mas: DEGREE / 3.6e6,
    rad: 1,
  };
  const factor = known[unit];
  if (factor !== undefined) return factor;
  throw header.error(`CUNIT${axis + 1} is ${unit}: expected an angle such as deg`, `CUNIT${axis + 1}`);
}

/** CD, or CDELT with PC, or CDELT with CROTA of the axis of declination. */
function pixelMatrix(header: Header, ra: number, dec: number): SkyAxes["matrix"] {
  const [i, j] = [ra + 1, dec + 1];
  const units = [unitOf(header, ra), unitOf(header, dec)] as const;
  const element = (name: string, row: number, column: number) => header.number(`${name}${row}_${column}`);
  const cd = [element("CD", i, i), element("CD", i, j), element("CD", j, i), element("CD", j, j)];
  let matrix: readonly number[];
  if (cd.some((value) => value !== undefined)) {
    const [a, b, c, d] = cd.map((value) => value ?? 0);
    matrix = [a! * units[0], b! * units[0], c! * units[1], d! * units[1]];
  } else {
    const steps = [header.number(`CDELT${i}`), header.number(`CDELT${j}`)];
    if (steps[0] === undefined || steps[1] === undefined) {
      throw header.error(
        `CDELT${i} and CDELT${j}, or a CD matrix, are missing: the size of a pixel is unknown`,
        undefined,
        "Give the image its coordinates back",
      );
    }
    const [dx, dy] = [steps[0] * units[0], steps[1] * units[1]];
    const pc = [element("PC", i, i), element("PC", i, j), element("PC", j, i), element("PC", j, j)];
    const rota = (header.number(`CROTA${j}`) ?? 0) * DEGREE;
    matrix = pc.some((value) => value !== undefined)
      ? [dx * (pc[0] ?? 1), dx * (pc[1] ?? 0), dy * (pc[2] ?? 0), dy * (pc[3] ?? 1)]
      : [dx * Math.cos(rota), -dy * Math.sin(rota), dx * Math.sin(rota), dy * Math.cos(rota)];
  }
  const [a, b, c, d] = matrix as [number, number, number, number];
  if (!(Math.abs(a * d - b * c) > 0)) {
    throw header.error("the pixels have no size: CDELT, CD or PC make a matrix without an inverse");
  }
  return [a, b, c, d];
}

function equinoxOf(header: Header): number {
  const given = header.looseNumber("EQUINOX") ?? header.looseNumber("EPOCH");
  if (given !== undefined) return given;
  const system = (header.shown("RADESYS") ?? header.shown("RADECSYS") ?? "").trim().toUpperCase();
  if (system.startsWith("FK4")) return 1950;
  return 2000;
}

/** How far from its SIN place the outermost pixel lies. */
function refuseBentPixels(header: Header, axes: SkyAxes, lengths: readonly [number, number]): void {
  const [a, b, c, d] = axes.matrix;
  const cell = Math.sqrt(Math.abs(a * d - b * c));
  for (const x of [0, lengths[0] - 1]) {
    for (const y of [0, lengths[1] - 1]) {
      const [dx, dy] = [x - axes.reference[0], y - axes.reference[1]];
      const radius = Math.hypot(a * dx + b * dy, c * dx + d * dy);
      const sine = SINE_OF_RADIUS[axes.projection]!(radius);
      const shift = Math.abs(sine - radius) / cell;
      if (shift <= MOST_SHIFT) continue;
      throw header.error(
        `the ${axes.projection} projection puts the corner of the image ${shift.toFixed(1)} pixels from where SIN does`,
        `CTYPE${axes.axes[0] + 1}`,
        "Make the image in the SIN projection, or a smaller one",
      );
    }
  }
  for (const [x, y] of [
    [0, 0],
    [lengths[0] - 1, lengths[1] - 1],
    [0, lengths[1] - 1],
    [lengths[0] - 1, 0],
  ] as const) {
    const [dx, dy] = [x - axes.reference[0], y - axes.reference[1]];
    if (Math.hypot(a * dx + b * dy, c * dx + d * dy) >= 1) {
      throw header.error("the image reaches beyond the hemisphere about its reference point", "CRPIX1");
    }
  }
}
