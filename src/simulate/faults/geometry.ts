/** Faults of what is written about a row: u, v, w and the order of its antennas; and of the antenna table. */
import { SPEED_OF_LIGHT } from "../../util/constants.ts";
import type { Observation } from "../observation.ts";
import { productsWithSignal } from "../sky.ts";
import type { CompiledFault, RowState } from "./effect.ts";
import type { FaultOf } from "./schema.ts";
import { antennaScope, coverage, keepProducts, marksAll, placeOf, scopeOf } from "./scope.ts";

type HeaderFault = FaultOf<"flipped-axis" | "zeroed-axis" | "wrong-unit" | "swapped-order">;

export function compileHeaderFault(
  fault: HeaderFault,
  index: number,
  observation: Observation,
): CompiledFault {
  const scope = scopeOf(fault, observation, placeOf(index));
  const { header, size, unit } = changeOf(fault, observation);
  return {
    kind: fault.kind,
    cause: "tables",
    selection: scope.selection,
    size,
    unit,
    spoils: "geometry",
    effect: {
      stages: { header },
      covers: coverage(scope),
      mark: marksAll(scope.samples),
    },
  };
}

function changeOf(
  fault: HeaderFault,
  observation: Observation,
): { header: (row: RowState) => void; size: number; unit: string } {
  switch (fault.kind) {
    case "flipped-axis":
      return { header: scaleAxis(fault.axis, -1), size: -1, unit: "ratio" };
    case "zeroed-axis":
      return { header: scaleAxis(fault.axis, 0), size: 0, unit: "ratio" };
    case "wrong-unit": {
      const factor = fault.unit === "metres" ? SPEED_OF_LIGHT : observation.setup.frequencies[0]!;
      const header = (row: RowState): void => {
        row.u *= factor;
        row.v *= factor;
        row.w *= factor;
      };
      return { header, size: factor, unit: "ratio" };
    }
    case "swapped-order": {
      // The labels alone: u, v, w and the samples stay those of the true order.
      const header = (row: RowState): void => {
        const { antenna1 } = row;
        row.antenna1 = row.antenna2;
        row.antenna2 = antenna1;
      };
      return { header, size: 1, unit: "exchange" };
    }
  }
}

function scaleAxis(axis: "u" | "v" | "w", factor: number): (row: RowState) => void {
  return (row) => {
    row[axis] = factor === 0 ? 0 : row[axis] * factor;
  };
}

/** `observe` has moved the antenna already: here is what it means. */
export function compilePosition(
  fault: FaultOf<"antenna-position">,
  index: number,
  observation: Observation,
): CompiledFault {
  const scope = antennaScope({ antenna: fault.antenna }, observation, placeOf(index));
  const seen = productsWithSignal(observation);
  // Wrong delays turn signals; a wrong table is wrong whatever the sample holds.
  const samples =
    fault.of === "model" ? keepProducts(scope.samples, observation, (_, i) => seen[i]!) : scope.samples;
  return {
    kind: fault.kind,
    cause: fault.of === "uvw" ? "antenna" : "tables",
    selection: scope.selection,
    size: Math.hypot(...fault.offset),
    unit: "m",
    spoils: fault.of === "model" ? "values" : "geometry",
    effect: {
      stages: {},
      covers: coverage(scope),
      mark: marksAll(samples),
    },
  };
}
