/** The faults of a scenario, each worked out against its observation. */
import type { Observation } from "../observation.ts";
import type { CompiledFault } from "./effect.ts";
import { compileHeaderFault, compilePosition } from "./geometry.ts";
import { compileInterference } from "./interference.ts";
import type { Fault } from "./schema.ts";
import { placeOf, type Scope, scopeOf } from "./scope.ts";
import { compileAntennaFault, compileBaselineFault, compileExchange } from "./signal.ts";
import { compileSampleFault } from "./values.ts";

/** A fault of the rows themselves, for the schedule. */
export interface RowFault {
  readonly kind: "missing-rows" | "duplicate-rows" | "reversed-rows";
  readonly times: Uint8Array;
  readonly baselines: Uint8Array;
}

/** @throws InputError when a fault names what the scenario does not have */
export function compileFaults(observation: Observation): CompiledFault[] {
  return observation.scenario.faults.map((fault, index) => compile(fault, index, observation));
}

function compile(fault: Fault, index: number, observation: Observation): CompiledFault {
  switch (fault.kind) {
    case "persistent-line":
    case "burst":
    case "drifting-line":
    case "lone-samples":
      return compileInterference(fault, index, observation);
    case "silent-antenna":
    case "weak-antenna":
    case "dropout":
    case "gain-step":
    case "hand-off":
    case "phase-jump":
    case "half-turn":
    case "delay-slope":
    case "phase-noise":
    case "noisy":
      return compileAntennaFault(fault, index, observation);
    case "exchanged-hands":
      return compileExchange(fault, index, observation);
    case "baseline-phase":
    case "baseline-gain":
      return compileBaselineFault(fault, index, observation);
    case "stuck-zeros":
    case "not-finite":
    case "weight-mismatch":
    case "flags":
      return compileSampleFault(fault, index, observation);
    case "flipped-axis":
    case "zeroed-axis":
    case "wrong-unit":
    case "swapped-order":
      return compileHeaderFault(fault, index, observation);
    case "antenna-position":
      return compilePosition(fault, index, observation);
    case "missing-rows":
    case "duplicate-rows":
    case "reversed-rows": {
      const scope = scopeOf(fault, observation, placeOf(index));
      return {
        kind: fault.kind,
        cause: "tables",
        selection: scope.selection,
        size: rowsConcerned(scope),
        unit: "rows",
        spoils: "rows",
        effect: null,
      };
    }
  }
}

/** Faults that change which rows there are and in what order. */
export function rowFaults(observation: Observation): RowFault[] {
  return observation.scenario.faults.flatMap((fault, index): RowFault[] => {
    if (fault.kind !== "missing-rows" && fault.kind !== "duplicate-rows" && fault.kind !== "reversed-rows") {
      return [];
    }
    const { times, baselines } = scopeOf(fault, observation, placeOf(index));
    return [{ kind: fault.kind, times, baselines }];
  });
}

function rowsConcerned({ times, baselines }: Scope): number {
  return count(times) * count(baselines);
}

function count(marks: Uint8Array): number {
  return marks.reduce((sum, mark) => sum + mark, 0);
}
