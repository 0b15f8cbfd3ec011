/** Everything a survey says, to the last bit, in a form that compares. */
import type { Survey } from "../../src/measure/survey-result.ts";

export function surveyBits(survey: Survey): unknown {
  const hex = (array: { buffer: ArrayBufferLike; byteOffset: number; byteLength: number }) =>
    Buffer.from(array.buffer, array.byteOffset, array.byteLength).toString("base64");
  const arrays = (record: object) =>
    Object.entries(record).map(([name, value]) => [
      name,
      ArrayBuffer.isView(value) ? hex(value as Uint8Array) : value,
    ]);
  return {
    baselines: survey.baselines,
    tracks: arrays(survey.tracks),
    levels: arrays(survey.levels),
    times: hex(survey.times),
    scans: survey.scans,
    totals: survey.totals,
    measures: [...survey.measures.values()].map((measure) => [measure.name, measure.table.objects()]),
  };
}
