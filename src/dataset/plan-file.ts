/**
 * plan.yaml: the image that the user wants, every key optional. Angles, flux densities and lengths carry their units;
 * what is misspelt, out of range or contradictory is refused with its line and column.
 */
import { isMap, isScalar, isSeq, LineCounter, type ParsedNode, parseDocument, type Scalar } from "yaml";
import { z } from "zod";
import { InputError, nearest, type Place } from "../util/errors.ts";
import { readSmallText } from "../util/small-text.ts";
import { parseAngle, parseFlux, parseLength } from "../util/units.ts";
import type { LineRange, PlanRequest, Weighting } from "./plan-request.ts";

/** The parser of units throws; zod collects. */
function quantity(parse: (text: string) => number, least: number, most: number, bounds: string) {
  return z.string().transform((text, context) => {
    try {
      const value = parse(text);
      if (value > least && value <= most) return value;
      context.addIssue({ code: "custom", message: `${text} is out of range: expected ${bounds}` });
    } catch (error) {
      if (!(error instanceof InputError)) throw error;
      const advice = error.advice === undefined ? "" : `. ${error.advice}`;
      context.addIssue({ code: "custom", message: `${error.message}${advice}` });
    }
    return z.NEVER;
  });
}

const angle = quantity(parseAngle, 0, Math.PI / 2, "more than 0 and at most 90deg");
/** Plans often say "a beam": a brightness in Jy/beam is the flux density of a point source. */
const flux = quantity((text) => parseFlux(text.replace(/\s*\/\s*beam$/i, "")), 0, 1e12, "more than 0");
const length = quantity(parseLength, 0, 1e5, "more than 0 and at most 100km");

const ratio = z.string().transform((text, context) => {
  const value = /^[+]?(\d+\.?\d*|\.\d+)([eE][+-]?\d+)?$/.test(text) ? Number(text) : Number.NaN;
  if (value >= 1 && value <= 1e12) return value;
  context.addIssue({
    code: "custom",
    message: `"${text}" is not a dynamic range: expected peak over rms, 1 or more, such as 5000`,
  });
  return z.NEVER;
});

const weighting = z.string().transform((text, context): Weighting => {
  const word = text.trim();
  if (word === "natural" || word === "uniform") return { kind: word };
  const match = /^robust\s*\(\s*([+-]?(?:\d+\.?\d*|\.\d+))\s*\)$/.exec(word);
  if (match !== null && Math.abs(Number(match[1])) <= 5) return { kind: "robust", robust: Number(match[1]) };
  const near = nearest(word, ["natural", "uniform", "robust(0)"]);
  context.addIssue({
    code: "custom",
    message:
      `unknown weighting "${text}"${near === undefined ? "" : `: did you mean ${near}?`}. ` +
      "Write natural, uniform or robust(R) with R from -5 to 5, such as robust(0.5)",
  });
  return z.NEVER;
});

const yesOrNo = z.string().transform((text, context) => {
  const word = text.trim().toLowerCase();
  if (word === "yes" || word === "true") return true;
  if (word === "no" || word === "false") return false;
  context.addIssue({ code: "custom", message: `"${text}" is neither yes nor no` });
  return z.NEVER;
});

const purpose = z.string().transform((text, context) => {
  const word = text.trim();
  if (word === "continuum" || word === "line" || word === "calibrator") return word;
  const near = nearest(word, ["continuum", "line", "calibrator"]);
  context.addIssue({
    code: "custom",
    message: `unknown purpose "${text}"${near === undefined ? "" : `: did you mean ${near}?`}. Write continuum, line or calibrator`,
  });
  return z.NEVER;
});

const lineChannels = z.string().transform((text, context): LineRange[] => {
  const ranges: LineRange[] = [];
  for (const part of text.split(",")) {
    const match = /^\s*(\d{1,9})\s*:\s*(\d{1,9})(?:\s*-\s*(\d{1,9}))?\s*$/.exec(part);
    if (match === null) {
      context.addIssue({
        code: "custom",
        message: `"${part.trim()}" names no channels: write sub-band:channels from 0, such as "0:14-28,1:3"`,
      });
      return z.NEVER;
    }
    const [low, high] = [Number(match[2]), Number(match[3] ?? match[2])];
    if (low > high) {
      context.addIssue({ code: "custom", message: `"${part.trim()}" runs backwards: write the lower first` });
      return z.NEVER;
    }
    ranges.push({ subband: Number(match[1]), channels: [low, high] });
  }
  return ranges;
});

/** Key in the file, key of the request, what it must hold. */
const FORM = {
  field_of_view: { as: "fieldOfView", schema: angle },
  resolution: { as: "resolution", schema: angle },
  largest_scale: { as: "largestScale", schema: angle },
  target_rms: { as: "targetRms", schema: flux },
  dynamic_range: { as: "dynamicRange", schema: ratio },
  dish_diameter: { as: "dishDiameter", schema: length },
  weighting: { as: "weighting", schema: weighting },
  corrects_w: { as: "correctsW", schema: yesOrNo },
  purpose: { as: "purpose", schema: purpose },
  line_channels: { as: "lineChannels", schema: lineChannels },
  expected_sefd: { as: "expectedSefd", schema: flux },
} as const;
type Key = keyof typeof FORM;
const KEYS = Object.keys(FORM) as Key[];

/** @throws InputError when the file cannot be read, is too large or is not a plan */
export async function readPlan(path: string): Promise<PlanRequest> {
  return parsePlan(await readSmallText(path, "plan"), path);
}

/**
 * @param file name to put in errors
 * @throws InputError with line and column
 */
export function parsePlan(text: string, file: string): PlanRequest {
  const lines = new LineCounter();
  const place = (offset: number | undefined): Place => {
    if (offset === undefined) return { file };
    const { line, col } = lines.linePos(offset);
    return { file, line, column: col };
  };
  const document = parseDocument(text, { lineCounter: lines, prettyErrors: false, merge: false });
  const broken = document.errors[0];
  if (broken !== undefined) {
    throw new InputError(
      `this is not YAML: ${broken.message}`,
      place(broken.pos[0]),
      "Write one key: value a line",
    );
  }
  const root = document.contents;
  if (root === null || (isScalar(root) && root.value === null)) return {};
  if (!isMap<ParsedNode, ParsedNode | null>(root)) {
    throw new InputError(
      "a plan is a list of key: value lines",
      place(rangeStart(root)),
      `Keys: ${KEYS.join(", ")}`,
    );
  }
  const request: Record<string, unknown> = {};
  const at = new Map<Key, Place>();
  for (const { key: keyNode, value } of root.items) {
    const key = keyOf(keyNode, place(rangeStart(keyNode)));
    const where = place(rangeStart(value) ?? rangeStart(keyNode));
    const checked = FORM[key].schema.safeParse(textOf(key, value, where));
    if (!checked.success) throw new InputError(`${key}: ${checked.error.issues[0]!.message}`, where);
    request[FORM[key].as] = checked.data;
    at.set(key, where);
  }
  const plan = request as PlanRequest;
  refuseContradictions(plan, at);
  return plan;
}

function rangeStart(node: ParsedNode | null): number | undefined {
  return node?.range[0];
}

function keyOf(node: ParsedNode, place: Place): Key {
  const word = isScalar(node) ? String(node.value) : "";
  if (Object.hasOwn(FORM, word)) return word as Key;
  const near = nearest(word, KEYS);
  throw new InputError(
    `unknown key "${word}"${near === undefined ? "" : `: did you mean "${near}"?`}`,
    place,
    near === undefined ? `Keys: ${KEYS.join(", ")}` : undefined,
  );
}

/** What the user wrote, numbers as written. Line channels may also be a YAML list. */
function textOf(key: Key, node: ParsedNode | null, place: Place): string {
  if (key === "line_channels" && isSeq(node) && node.items.every((item) => isScalar(item))) {
    return node.items.map((item) => scalarText(item as Scalar.Parsed)).join(",");
  }
  if (node === null || (isScalar(node) && node.value === null)) {
    throw new InputError(`${key} has no value`, place, "Give it one, or leave the key out");
  }
  if (!isScalar(node)) throw new InputError(`${key} wants one value`, place);
  return scalarText(node as Scalar.Parsed);
}

function scalarText(node: Scalar.Parsed): string {
  return (typeof node.value === "string" ? node.value : (node.source ?? String(node.value))).trim();
}

function refuseContradictions(plan: PlanRequest, at: ReadonlyMap<Key, Place>): void {
  const { fieldOfView, resolution, largestScale } = plan;
  if (resolution !== undefined && fieldOfView !== undefined && resolution >= fieldOfView) {
    throw new InputError(
      "resolution is not smaller than field_of_view",
      at.get("resolution"),
      "resolution is the full width of the beam, field_of_view the full width of the image",
    );
  }
  if (resolution !== undefined && largestScale !== undefined && largestScale < resolution) {
    throw new InputError(
      "largest_scale is smaller than resolution",
      at.get("largest_scale"),
      "largest_scale is the widest structure that the image must hold",
    );
  }
}
