/** Numbers of an image and of uv coverage as tables show them; findings use the rules' own `formatQuantity`. */
import { formatAngle, formatNumber } from "../util/units.ts";

/** Wavelengths, as wavelengths, kilo- or megawavelengths. */
export function formatWavelengths(value: number): string {
  if (!Number.isFinite(value)) return "unknown";
  const size = Math.abs(value);
  if (size >= 0.9995e6) return `${formatNumber(value / 1e6)} Mλ`;
  if (size >= 0.9995e3) return `${formatNumber(value / 1e3)} kλ`;
  return `${formatNumber(value)} λ`;
}

/** Arcseconds, in the angular unit that reads best. */
export function formatArcsec(arcsec: number): string {
  return formatAngle((arcsec * Math.PI) / 648000);
}

/** A relative change with its sign and two digits: `+1.2 %`, `-13 %`, `none` below 0.01 %. */
export function formatChange(fraction: number): string {
  if (!Number.isFinite(fraction)) return "unknown";
  if (Math.abs(fraction) < 5e-5) return "none";
  return `${fraction < 0 ? "-" : "+"}${formatNumber(Math.abs(fraction) * 100, 2)} %`;
}

/** A ratio such as a dynamic range: `12,400`, `850`, `3.2`. */
export function formatRatio(value: number): string {
  if (value === Number.POSITIVE_INFINITY) return "no limit";
  if (!Number.isFinite(value)) return "unknown";
  if (Math.abs(value) >= 1e9) return value.toExponential(1).replace("e+", "e");
  if (Math.abs(value) < 999.5) return formatNumber(value);
  return String(Number(value.toPrecision(3))).replace(/\B(?=(\d{3})+$)/g, ",");
}
