import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { finishSurvey } from "../../../src/measure/finish-survey.ts";
import { decodeState } from "../../../src/measure/state/decode.ts";
import { encodeState } from "../../../src/measure/state/encode.ts";
import { StateReader } from "../../../src/measure/state/reader.ts";
import { buffersOf, type StateValue } from "../../../src/measure/state/value.ts";
import { joinParts, surveyPart } from "../../../src/measure/survey.ts";
import { SurveyPart } from "../../../src/measure/survey-part.ts";
import { InputError } from "../../../src/util/errors.ts";
import { withFaults } from "../../support/scenarios.ts";
import { surveyBits } from "../survey-bits.ts";

const { dataset } = withFaults(
  [
    { kind: "flags", channels: "0", share: 0.5 },
    { kind: "not-finite", channels: "5", share: 0.3 },
    { kind: "duplicate-rows", time: ["60s", "80s"] },
    { kind: "swapped-order", antennas: [3] },
  ],
  {
    name: "odd rows",
    time: { duration: "3min" },
    array: { layout: { kind: "spiral", antennas: 5, inner: "40m", radius: "1km", relief: "2m" } },
    frequency: { channels: 6 },
  },
);

function bytesOf(value: StateValue): Uint8Array<ArrayBuffer> {
  return new Uint8Array(Buffer.concat(encodeState(value)));
}

const MEMORIES = [
  ["one cell a row", undefined],
  ["time bins and shared sketches", 60_000],
] as const;

describe("the state of a survey", () => {
  it.each(MEMORIES)("goes through bytes without changing a bit of the result: %s", async (_, memory) => {
    const options = memory === undefined ? {} : { memory };
    const whole = surveyBits(finishSurvey(await surveyPart(dataset, options)));
    const cut = Math.floor(dataset.rows / 3);
    const parts = await Promise.all([
      surveyPart(dataset, { ...options, rows: [cut, dataset.rows] }),
      surveyPart(dataset, { ...options, rows: [0, cut] }),
    ]);
    const [first, second] = parts.map((part) =>
      SurveyPart.from(new StateReader(decodeState(bytesOf(part.state()))), dataset, memory),
    );
    expect(surveyBits(finishSurvey(joinParts([first!, second!])))).toEqual(whole);
  });

  it("is handed over with every buffer once", async () => {
    const state = (await surveyPart(dataset)).state();
    const buffers = buffersOf(state);
    expect(new Set(buffers).size).toBe(buffers.length);
    expect(buffers.length).toBeGreaterThan(20);
  });

  it.each(MEMORIES)(
    "is refused or taken, and never more, when any of its bytes is another: %s",
    async (_, memory) => {
      const part = await surveyPart(dataset, memory === undefined ? {} : { memory });
      const good = bytesOf(part.state());
      let refused = 0;
      for (let i = 0; i < 400; i++) {
        const bytes = good.slice();
        // Spread over the bytes, the first ones, which are nearly all structure, among them.
        const at = i < 100 ? i : Math.floor((bytes.length * (i * 0.6180339887498949)) % bytes.length);
        bytes[at] = bytes[at]! ^ (1 << (i % 8));
        try {
          finishSurvey(SurveyPart.from(new StateReader(decodeState(bytes)), dataset, memory));
        } catch (error) {
          expect(error, `byte ${at}: ${error}`).toBeInstanceOf(InputError);
          refused += 1;
        }
      }
      expect(refused).toBeGreaterThan(50);
    },
  );
});

const value: fc.Arbitrary<StateValue> = fc.letrec<{ value: StateValue }>((tie) => ({
  value: fc.oneof(
    { maxDepth: 4 },
    fc.constantFrom(null, true, false),
    fc.double(),
    fc.string({ unit: "binary" }),
    fc.float64Array(),
    fc.uint16Array({ maxLength: 3000 }),
    fc.int8Array(),
    fc.array(tie("value")),
    fc.dictionary(fc.string(), tie("value"), { noNullPrototype: true }),
  ),
})).value;

describe("bytes of a state", () => {
  it("give back any value", () => {
    fc.assert(
      fc.property(value, (any) => {
        expect(decodeState(bytesOf(any))).toEqual(any);
      }),
      { numRuns: 60 },
    );
  });

  it("are refused with the byte wherever they are cut", () => {
    const bytes = bytesOf({ a: [1, "two", null], b: Float64Array.of(1, 2), c: true });
    for (let length = 0; length < bytes.length; length++) {
      expect(() => decodeState(bytes.slice(0, length), { file: "a.part", byte: 100 })).toThrow(InputError);
    }
    expect(() => decodeState(bytes.slice(0, 9), { file: "a.part", byte: 100 })).toThrow(
      /promised|end inside/,
    );
  });

  it("that are anybody's are refused", () => {
    fc.assert(
      fc.property(fc.uint8Array({ minLength: 1, maxLength: 60 }), (bytes) => {
        try {
          decodeState(new Uint8Array(bytes));
        } catch (error) {
          expect(error).toBeInstanceOf(InputError);
        }
      }),
    );
  });

  it("that promise more than they hold are refused before anything is made of it", () => {
    for (const tag of [4, 5, 6, 16, 23]) {
      const bytes = Uint8Array.of(tag, 255, 255, 255, 255, 0, 0, 0);
      expect(() => decodeState(bytes)).toThrow(/4294967295 things are promised, and 3 bytes are left/);
    }
  });

  it("that lie too deep in each other are refused", () => {
    const bytes = new Uint8Array(5 * 40);
    for (let i = 0; i < 40; i++) bytes.set([5, 1, 0, 0, 0], 5 * i);
    expect(() => decodeState(bytes)).toThrow(/more than 16 deep/);
  });
});
