/** An invented observation as a dataset, and the truth about it. */
import type { BlockRequest, Dataset, SampleBlock } from "../dataset/dataset.ts";
import { newBlock } from "../dataset/new-block.ts";
import { isoFromMjd } from "../util/dates.ts";
import { compileFaults } from "./faults/compile.ts";
import type { CompiledFault } from "./faults/effect.ts";
import { type Instrument, instrumentOf } from "./instrument.ts";
import { type Observation, observe } from "./observation.ts";
import { RowMaker } from "./rows.ts";
import type { Scenario } from "./scenario.ts";
import { type RowPlace, Schedule } from "./schedule.ts";
import { Truth } from "./truth.ts";

export interface Simulated {
  /** format "simulated"; rows are made when they are asked for, the same ones every time */
  readonly dataset: Dataset;
  readonly truth: Truth;
}

/** A block keeps under this, as a reader's does. */
const BLOCK_BYTES = 16e6;
const SAMPLE_BYTES = 12;

/** @throws InputError where the scenario contradicts itself */
export function simulate(scenario: Scenario): Simulated {
  const observation = observe(scenario);
  const faults = compileFaults(observation);
  const schedule = new Schedule(observation);
  let instrument: Instrument | undefined;
  const making: Making = {
    observation,
    faults,
    schedule,
    instrument: () => {
      instrument ??= instrumentOf(observation);
      return instrument;
    },
  };
  const dataset: Dataset = {
    name: scenario.name,
    files: [],
    bytes: 0,
    format: "simulated",
    header: {
      TELESCOP: observation.array.name,
      OBJECT: observation.fields.length === 1 ? observation.fields[0]!.name : "MULTI",
      "DATE-OBS": isoFromMjd(observation.start),
    },
    array: observation.array,
    fields: observation.fields,
    setups: [observation.setup],
    polarizations: observation.polarizations,
    shape: observation.shape,
    unit: scenario.unit,
    hasWeights: true,
    rows: schedule.rows,
    notes: [],
    blocks: (request) => blocks(making, request),
  };
  return { dataset, truth: new Truth(observation, faults, schedule, dataset) };
}

/** What the rows of a dataset are made from; shared by all who read it. */
interface Making {
  readonly observation: Observation;
  readonly faults: readonly CompiledFault[];
  readonly schedule: Schedule;
  readonly instrument: () => Instrument;
}

async function* blocks(making: Making, request: BlockRequest): AsyncIterable<SampleBlock> {
  const { observation, schedule } = making;
  // A maker of its own for each call: two may run at once.
  const maker = new RowMaker(observation, making.instrument(), making.faults);
  const first = Math.max(0, request.rows?.[0] ?? 0);
  const last = Math.min(schedule.rows, request.rows?.[1] ?? schedule.rows);
  const mostRows = Math.max(1, Math.floor(BLOCK_BYTES / (SAMPLE_BYTES * observation.rowSamples)));
  const blockRows = Math.max(1, Math.min(request.blockRows ?? mostRows, mostRows, last - first));
  const block = newBlock(blockRows, observation.shape, request.want);
  for (let row = first; row < last; row += blockRows) {
    block.firstRow = row;
    block.rows = Math.min(blockRows, last - row);
    fillBlock(block, making, maker, request.want);
    yield block;
  }
}

function fillBlock(block: SampleBlock, making: Making, maker: RowMaker, want: BlockRequest["want"]): void {
  const { observation, schedule } = making;
  const { row } = maker;
  const place: RowPlace = { time: 0, baseline: 0, copy: false };
  for (let k = 0; k < block.rows; k++) {
    schedule.locate(block.firstRow + k, place);
    maker.begin(place.time, place.baseline);
    block.time[k] = observation.times[place.time]!;
    // Files hold u, v, w in single precision: so does what has not been written yet.
    block.u[k] = Math.fround(row.u);
    block.v[k] = Math.fround(row.v);
    block.w[k] = Math.fround(row.w);
    block.antenna1[k] = row.antenna1;
    block.antenna2[k] = row.antenna2;
    block.subarray[k] = 1;
    block.field[k] = observation.fieldAt[place.time]! + 1;
    block.setup[k] = 0;
    block.integration[k] = observation.integration;
    if (want === "rows") continue;
    maker.weigh();
    const at = k * observation.rowSamples;
    block.weight.set(row.weight, at);
    if (want === "weights") continue;
    maker.sample();
    block.real.set(row.valueRe, at);
    block.imag.set(row.valueIm, at);
  }
}
