import { describe, expect, it } from "vitest";
import { derivePlan } from "../../src/imaging/derive-plan.ts";
import { forecast } from "../../src/imaging/forecast.ts";
import { localPosition, observedArray, projected, threeArms } from "./observed-array.ts";

const C = 299792458;
const RAD = Math.PI / 180;
const EARTH_RATE = 7.292115e-5;

interface Case {
  readonly declination: number;
  readonly field: number;
  readonly integrationTime: number;
  readonly channelWidth: number;
}

/**
 * What the averages leave of a source's visibility on every baseline, by adding up the visibilities of many short
 * times and narrow channels; the peak lost in the direction where it is worst.
 */
function averaged(
  antennas: readonly (readonly [number, number, number])[],
  hours: readonly number[],
  { declination, field, integrationTime, channelWidth }: Case,
  of: "time" | "channel",
): number {
  const positions = antennas.map((enu) => localPosition(enu, 34));
  const radius = Math.sin(field / 2);
  const depth = 1 - Math.sqrt(1 - radius * radius);
  const steps = 24;
  let worst = 0;
  for (let d = 0; d < 8; d++) {
    const [l, m] = [radius * Math.sin((Math.PI * d) / 8), radius * Math.cos((Math.PI * d) / 8)];
    let [sum, count] = [0, 0];
    for (const hour of hours) {
      for (let i = 0; i < positions.length; i++) {
        for (let j = i + 1; j < positions.length; j++) {
          const [p, q] = [positions[i]!, positions[j]!];
          const path = (shift: number) => {
            const [u, v, w] = projected(
              [p[0] - q[0], p[1] - q[1], p[2] - q[2]],
              hour + EARTH_RATE * shift,
              declination * RAD,
            );
            return (u * l + v * m - w * depth) / C;
          };
          const centre = path(0);
          for (let k = 0; k < steps; k++) {
            const share = (k + 0.5) / steps - 0.5;
            const turns =
              of === "time"
                ? (path(share * integrationTime) - centre) * 1.4e9
                : centre * share * channelWidth;
            sum += Math.cos(2 * Math.PI * turns);
          }
          count += steps;
        }
      }
    }
    worst = Math.max(worst, 1 - sum / count);
  }
  return worst;
}

describe("smearing at the edge of the field", () => {
  const antennas = threeArms(500, 3, 2);

  it.each<Case>([
    { declination: 20, field: 0.03, integrationTime: 300, channelWidth: 1e7 },
    { declination: -25, field: 0.04, integrationTime: 240, channelWidth: 8e6 },
    { declination: 75, field: 0.06, integrationTime: 150, channelWidth: 5e6 },
  ])("is that of averaged visibilities: $declination degrees, field $field rad", async (given) => {
    const observed = observedArray({
      antennas,
      declination: given.declination,
      integrations: 9,
      hours: [-4, 2],
      integrationTime: given.integrationTime,
      channelWidth: given.channelWidth,
      channels: 1,
      polarizations: ["I"],
    });
    const plan = derivePlan({ fieldOfView: given.field, weighting: { kind: "natural" } }, observed.survey);
    const { image } = await forecast(observed.survey, plan);
    const hours = Array.from({ length: 9 }, (_, t) => (-4 + (6 * t) / 8) * 15 * RAD);
    const time = averaged(antennas, hours, given, "time");
    const channel = averaged(antennas, hours, given, "channel");
    expect(time).toBeGreaterThan(0.005);
    expect(channel).toBeGreaterThan(0.005);
    expect(Math.abs(image.smearing.timeLossFraction / time - 1)).toBeLessThan(0.02);
    expect(Math.abs(image.smearing.bandwidthLossFraction / channel - 1)).toBeLessThan(0.02);
  });

  it("has no time loss to tell where the phase centre is unknown", async () => {
    const { survey } = observedArray({ antennas, integrations: 3 });
    const field = { ...survey.dataset.fields[0]!, declination: Number.NaN };
    const lost = { ...survey, dataset: { ...survey.dataset, fields: [field] } };
    const { image } = await forecast(lost, derivePlan({}, lost));
    expect(image.smearing.timeLossFraction).toBeNaN();
    expect(image.smearing.bandwidthLossFraction).toBeGreaterThan(0);
    expect(image.advice.find(({ name }) => name === "Safe averaging")!.value).toContain("an unknown time");
  });
});
