/** Faults of antennas and baselines that channel averages show, in an order that lets the earlier explain the later. */
import type { Survey } from "../../measure/survey-result.ts";
import type { DetectedEvent } from "../event.ts";
import type { DetectRequest } from "../request.ts";
import { gridOf } from "./grid.ts";
import { phaseJumps } from "./phase-jumps.ts";
import { silences } from "./silent.ts";

export function antennaFaults(survey: Survey, _request: DetectRequest): DetectedEvent[] {
  const grid = gridOf(survey);
  if (grid.planes.length === 0) return [];
  const events: DetectedEvent[] = [];
  events.push(...silences(grid));
  events.push(...phaseJumps(grid, new Set()));
  return events;
}
