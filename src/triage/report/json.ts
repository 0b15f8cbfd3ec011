/** `triage.json` and the flags of a triage: the contracts for other programs. Units are in the keys; see the schema. */
import { basename } from "node:path";
import { flagPart, selectionPart } from "../../report/json.ts";
import { tool } from "../../report/tool.ts";
import { exactly, jsonText } from "../../report/trim.ts";
import type { TriageCause } from "../causes/cause.ts";
import { isInside } from "../sky/look.ts";
import { widthsOf } from "../sky/patch.ts";
import type { ImageFindings, Triage } from "../triage.ts";
import { tracksOnOutliers } from "../uv/cells.ts";

/** Baselines of the uv plane that are listed, at most. */
const MOST_TRACKS = 50;

/** The whole triage, ending in a line end. */
export function triageJson(triage: Triage): string {
  const { check, dataset } = triage;
  return jsonText({
    format: "visvet-triage",
    version: 1,
    tool: tool(),
    dataset: dataset.name,
    statement: triage.statement,
    symptom: triage.symptom,
    image: triage.image === null ? null : imagePart(triage.image),
    causes: triage.causes.map(causePart),
    minor: triage.minor.map(causePart),
    flags: { file: "flags.json", entries: triage.flags.map(flagPart) },
    check: { verdict: check.verdict, score: Math.round(check.before.score) },
    blindSpots: triage.blindSpots,
  });
}

/** As `visvet apply` takes them. */
export function triageFlagsJson({ dataset, flags }: Triage): string {
  return jsonText({
    format: "visvet-flags",
    version: 1,
    dataset: dataset.name,
    entries: flags.map(flagPart),
  });
}

function causePart(cause: TriageCause): object {
  const { kind, title, where, scope, share, severity, evidence, rules, test, cure, flags } = cause;
  return {
    kind,
    title,
    where,
    scope: scope === null ? null : selectionPart(scope),
    shareFraction: share,
    severity,
    evidence,
    rules,
    test,
    cure,
    flags,
  };
}

function imagePart({ seen, cells, symptoms, ranking }: ImageFindings): object {
  const { image, frame, beam, sampling } = seen;
  const { evidence, predicted } = ranking;
  return {
    // Without its folder: the same image elsewhere gives the same triage.
    file: basename(image.file),
    unit: image.unit,
    size: image.size,
    rightAscensionRad: exactly(image.sky.rightAscension),
    declinationRad: exactly(image.sky.declination),
    cellRad: frame.cell,
    phaseCentreOffsetRad: frame.offset,
    beamMajorRad: beam.major,
    beamMinorRad: beam.minor,
    beamAngleRad: beam.angle,
    deconvolved: seen.deconvolved,
    weighting: seen.weighting.kind,
    sidelobesFraction: seen.sidelobes,
    heldByData: seen.held,
    scale: seen.scale,
    predictedNoise: seen.noise,
    power: evidence.power,
    noisePower: evidence.noisePower,
    sources: seen.sources.map((source) => ({
      flux: source.flux,
      eastRad: exactly(source.l),
      northRad: exactly(source.m),
      widthRad: source.shape[0] === 0 ? 0 : widthsOf(source.shape).major,
      inside: isInside(seen, source),
    })),
    symptoms: symptoms.map(({ word, present, text, measured }) => ({ word, present, text, measured })),
    predicted: predicted.map(({ kind, amplitude, sigmas, share }) => ({
      kind,
      amplitude,
      sigmas,
      shareFraction: share,
    })),
    uvPlane: {
      cells: cells.power.length,
      outliers: cells.outliers.length,
      tracks: tracksOnOutliers(seen, cells)
        .slice(0, MOST_TRACKS)
        .map(({ baseline, share, first, last }) => ({
          baseline: [
            sampling.survey.baselines[baseline]!.antenna1,
            sampling.survey.baselines[baseline]!.antenna2,
          ],
          shareFraction: share,
          time: exactly([seen.atoms.bins.start[first]!, seen.atoms.bins.end[last]!]),
        })),
    },
  };
}
