/** Right ascensions and declinations as people write them. */
import { InputError } from "../../util/errors.ts";
import { parseAngle } from "../../util/units.ts";

const SEXAGESIMAL = /^([+-]?)(\d+)\s*([hd:°])\s*(\d+)\s*[m:']\s*(\d+(?:\.\d*)?)\s*["s]?$/i;

/**
 * `8h30m12.5s`, `8:30:12.5` (hours), or an angle with a unit. Radians.
 * @throws InputError when it is neither
 */
export function parseRightAscension(text: string): number {
  const match = SEXAGESIMAL.exec(text.trim());
  if (match === null) return parseAngle(text);
  const degreesEach = match[3] === "d" || match[3] === "°" ? 1 : 15;
  return sexagesimal(match, text, 60) * degreesEach * (Math.PI / 180);
}

/** `-28d15m00s`, `-28:15:00` (degrees), or an angle with a unit. Radians. @throws InputError when it is neither */
export function parseDeclination(text: string): number {
  const match = SEXAGESIMAL.exec(text.trim());
  const radians = match === null ? parseAngle(text) : sexagesimal(match, text, 60) * (Math.PI / 180);
  if (Math.abs(radians) > Math.PI / 2 || match?.[3]?.toLowerCase() === "h") {
    throw new InputError(`"${text}" is no declination: expected -90deg to 90deg, such as -28d15m00s`);
  }
  return radians;
}

function sexagesimal(match: RegExpExecArray, text: string, base: number): number {
  const minutes = Number(match[4]);
  const seconds = Number(match[5]);
  if (minutes >= base || seconds >= base) {
    throw new InputError(`"${text}" is no angle: minutes and seconds go up to 59`);
  }
  const size = Number(match[2]) + minutes / 60 + seconds / 3600;
  return match[1] === "-" ? -size : size;
}
