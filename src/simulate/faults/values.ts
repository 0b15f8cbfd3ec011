/** Faults of finished samples, their weights and flags. */
import type { Observation } from "../observation.ts";
import { Random } from "../random.ts";
import { STREAM } from "../streams.ts";
import type { CompiledFault, Effect, RowState } from "./effect.ts";
import type { FaultOf } from "./schema.ts";
import { coverage, placeOf, scopeOf } from "./scope.ts";

type SampleFault = FaultOf<"stuck-zeros" | "not-finite" | "weight-mismatch" | "flags">;

export function compileSampleFault(
  fault: SampleFault,
  index: number,
  observation: Observation,
): CompiledFault {
  const scope = scopeOf(fault, observation, placeOf(index));
  const share = "share" in fault ? fault.share : 1;
  const visit = visitor(scope.samples, share, index, observation.scenario.seed);
  const effect: Effect = {
    stages: stagesOf(fault, visit),
    covers: coverage(scope),
    mark: (time, baseline, out, at) =>
      visit(time, baseline, (sample) => {
        out[at + sample] = 1;
      }),
  };
  const factor = fault.kind === "weight-mismatch" ? fault.factor : share;
  return {
    kind: fault.kind,
    cause: causeOf(fault),
    selection: scope.selection,
    size: factor,
    unit: fault.kind === "weight-mismatch" ? "ratio" : "fraction",
    spoils: spoilsOf(fault),
    effect,
  };
}

type Visit = (time: number, baseline: number, hit: (sample: number) => void) => void;

/** Every sample of the list, or the share of them that the row's own stream draws. */
function visitor(samples: Int32Array, share: number, index: number, seed: number): Visit {
  if (share >= 1) {
    return (_time, _baseline, hit) => {
      for (const sample of samples) hit(sample);
    };
  }
  const random = new Random();
  return (time, baseline, hit) => {
    random.restart(seed, STREAM.fault, index, time, baseline);
    for (const sample of samples) if (random.uniform() < share) hit(sample);
  };
}

function stagesOf(fault: SampleFault, visit: Visit): Effect["stages"] {
  const each = (change: (row: RowState, sample: number) => void) => (row: RowState) =>
    visit(row.time, row.baseline, (sample) => change(row, sample));
  switch (fault.kind) {
    case "stuck-zeros":
      return {
        value: each((row, sample) => {
          row.valueRe[sample] = 0;
          row.valueIm[sample] = 0;
        }),
      };
    case "weight-mismatch":
      return {
        weight: each((row, sample) => {
          row.weight[sample]! *= fault.factor;
        }),
      };
    case "flags":
      return {
        weight: each((row, sample) => {
          row.weight[sample] = -Math.abs(row.weight[sample]!);
        }),
      };
    case "not-finite": {
      const bad = fault.value === "NaN" ? Number.NaN : Number.POSITIVE_INFINITY;
      if (fault.of === "weight") {
        return {
          weight: each((row, sample) => {
            row.weight[sample] = bad;
          }),
        };
      }
      return {
        value: each((row, sample) => {
          row.valueRe[sample] = bad;
          row.valueIm[sample] = bad;
        }),
      };
    }
  }
}

function spoilsOf(fault: SampleFault): CompiledFault["spoils"] {
  if (fault.kind === "flags") return "flags";
  if (fault.kind === "weight-mismatch") return "weights";
  return fault.kind === "not-finite" && fault.of === "weight" ? "weights" : "values";
}

function causeOf(fault: SampleFault): CompiledFault["cause"] {
  if (fault.antennas?.length === 1) return "antenna";
  if (fault.baselines !== undefined) return "baseline";
  if (fault.channels !== undefined) return "channels";
  return fault.time === undefined ? "samples" : "time";
}
