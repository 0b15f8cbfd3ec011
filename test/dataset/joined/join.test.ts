import { readdirSync, renameSync } from "node:fs";
import { describe, expect, it } from "vitest";
import type { Dataset } from "../../../src/dataset/dataset.ts";
import { openDataset } from "../../../src/dataset/open.ts";
import { reopen } from "../../../src/dataset/recipe.ts";
import { surveyDataset } from "../../../src/measure/survey.ts";
import { simulated } from "../../support/scenarios.ts";
import { lineOfError, readAll } from "../read-all.ts";
import { changed, pieceFolder, renumbered, rowsOf } from "./pieces.ts";

const { write } = pieceFolder();
/** 36 baselines, 3 minutes: 18 integrations. */
const time = { start: "2026-03-01T12:00:00", duration: "3min" };
const whole = simulated({ time }).dataset;
const ROWS = whole.rows;
const HALF = 36 * 9;
const codes = ({ notes }: Dataset) => notes.map(({ code }) => code);
const text = ({ notes }: Dataset, code: string) => notes.find((note) => note.code === code)?.text;
const first = await write(rowsOf(whole, 0, HALF), "z-first.uvfits");
const second = await write(rowsOf(whole, HALF, ROWS), "a-second.uvfits");
const atOnce = await write(whole, "whole.uvfits");

describe("several files of one observation", () => {
  it("are one dataset in the order of time, whatever the order of their names", async () => {
    const joined = await openDataset([second, first]);
    const one = await openDataset(atOnce);
    expect(joined.files).toEqual([first, second]);
    expect(await readAll(joined)).toEqual(await readAll(one));
    expect(joined.summary).toEqual(one.summary);
    expect([joined.array, joined.fields, joined.setups]).toEqual([one.array, one.fields, one.setups]);
    expect(joined.notes).toEqual(one.notes);
  });

  it("are surveyed to the same numbers as one file", async () => {
    const joined = await surveyDataset(await openDataset([first, second]));
    const one = await surveyDataset(await openDataset(atOnce));
    for (const [name, measure] of one.measures) {
      expect(joined.measures.get(name)!.table.objects(), name).toEqual(measure.table.objects());
    }
  });

  it("give any range of rows, and open only the files that hold it", async () => {
    const joined = await openDataset([first, second]);
    const all = await readAll(joined);
    const across = await readAll(joined, { want: "samples", rows: [HALF - 5, HALF + 7] });
    expect(across.time).toEqual(all.time.slice(HALF - 5, HALF + 7));
    expect(across.real).toEqual(all.real.slice(32 * (HALF - 5), 32 * (HALF + 7)));
    renameSync(second, `${second}.away`);
    try {
      expect((await readAll(joined, { want: "rows", rows: [0, HALF] })).time).toHaveLength(HALF);
      expect(await lineOfError(readAll(joined))).toContain("a-second.uvfits: there is no such file");
    } finally {
      renameSync(`${second}.away`, second);
    }
  });

  it("are opened again from the recipe with the same rows", async () => {
    const joined = await openDataset([second, first]);
    const again = await reopen(structuredClone(joined.recipe!));
    expect({ ...again, blocks: null }).toEqual({ ...joined, blocks: null });
    expect(await readAll(again)).toEqual(await readAll(joined));
  });

  it("may be many: few are open at a time", async () => {
    const paths = await Promise.all(
      Array.from({ length: 60 }, (_, k) => {
        const from = 10 * k;
        return write(rowsOf(whole, from, from + 10), `many-${k}.uvfits`);
      }),
    );
    const joined = await openDataset(paths);
    expect(joined.rows).toBe(600);
    let most = 0;
    const before = readdirSync("/proc/self/fd").length;
    for await (const block of joined.blocks({ want: "samples" })) {
      most = Math.max(most, readdirSync("/proc/self/fd").length + 0 * block.rows);
    }
    expect(most - before).toBeLessThan(4);
  });

  it("call the rows that are in two files duplicates, and say that the files overlap", async () => {
    const longer = await write(rowsOf(whole, HALF - 72, ROWS), "overlapping.uvfits");
    const joined = await openDataset([first, longer]);
    expect(text(joined, "files-overlap")).toMatch(
      /^z-first.uvfits and overlapping.uvfits overlap in time by 10/,
    );
    const { totals } = await surveyDataset(joined);
    expect([totals.duplicateRows, totals.outOfOrderRows]).toEqual([72, 1]);
  });

  it("say how long the gaps between them are", async () => {
    const late = await write(
      changed(rowsOf(whole, HALF, ROWS), ({ time }) => {
        for (let row = 0; row < time.length; row++) time[row]! += 600 / 86_400;
      }),
      "late.uvfits",
    );
    const joined = await openDataset([late, first]);
    expect(text(joined, "gap-between-files")).toMatch(
      /^the files leave a gap in time: 10.*min between z-first.uvfits and late.uvfits/,
    );
  });
});

describe("antennas of several files", () => {
  it("are joined by name where their numbers differ", async () => {
    const turned = await write(
      renumbered(rowsOf(whole, HALF, ROWS), (n) => 10 - n),
      "turned.uvfits",
    );
    const joined = await openDataset([first, turned]);
    const plain = await openDataset(atOnce);
    const names = ({ array }: Dataset) => array.antennas.map(({ number, name }) => `${number} ${name}`);
    // The writer names antennas by the table it is given: names go with places, and so do numbers after joining.
    expect(names(joined)).toEqual(names(plain));
    const [ours, theirs] = [await readAll(joined), await readAll(plain)];
    expect([ours.antenna1, ours.antenna2]).toEqual([theirs.antenna1, theirs.antenna2]);
    expect(text(joined, "antennas-renumbered")).toContain("joined by name");
  });

  it("that one file alone has get a number that is free", async () => {
    const other = changed(rowsOf(whole, HALF, ROWS), () => {}, {
      array: {
        ...whole.array,
        antennas: whole.array.antennas.map((one) => (one.number === 4 ? { ...one, name: "NEWCOMER" } : one)),
      },
    });
    const joined = await openDataset([first, await write(other, "newcomer.uvfits")]);
    expect(joined.array.antennas.find(({ name }) => name === "NEWCOMER")?.number).toBe(10);
    const rows = await readAll(joined, { want: "rows" });
    expect(rows.antenna2.slice(0, HALF)).not.toContain(10);
    expect([...rows.antenna1, ...rows.antenna2].slice(0).filter((n) => n === 10)).toHaveLength(8 * 9);
  });

  it("that were moved are two antennas", async () => {
    const other = changed(rowsOf(whole, HALF, ROWS), () => {}, {
      array: {
        ...whole.array,
        antennas: whole.array.antennas.map((one) =>
          one.number === 4
            ? { ...one, position: [one.position![0] + 30, one.position![1], one.position![2]] }
            : one,
        ),
      },
    });
    const joined = await openDataset([first, await write(other, "moved.uvfits")]);
    expect(joined.array.antennas).toHaveLength(10);
    expect(text(joined, "antenna-moved")).toContain("more than 1 m apart");
  });

  it("of another array are refused", async () => {
    const { dataset } = simulated({ time, array: { name: "Otter Array" } });
    const strange = changed(dataset, () => {}, {
      array: {
        ...dataset.array,
        antennas: dataset.array.antennas.map((one) => ({ ...one, name: `OTTER${one.number}` })),
      },
    });
    expect(await lineOfError(openDataset([first, await write(strange, "strange.uvfits")]))).toMatch(
      /strange.uvfits: the array is "Otter Array" and shares no antenna with "Larkfield Array" of the other files\. These are/,
    );
  });

  it("keep one sidereal time, each file's reference date taken into account", async () => {
    const tomorrow = simulated({ time: { ...time, start: "2026-03-02T12:00:00" } }).dataset;
    const joined = await openDataset([first, await write(tomorrow, "tomorrow.uvfits")]);
    expect(codes(joined)).not.toContain("sidereal-times-disagree");
    const { array } = tomorrow;
    const wrong = { ...array, siderealTimeAtReference: array.siderealTimeAtReference! + 1 };
    const odd = await openDataset([first, await write({ ...tomorrow, array: wrong }, "odd-clock.uvfits")]);
    expect(text(odd, "sidereal-times-disagree")).toContain("is 1.000 deg from that of the first file");
  });
});

describe("fields and frequencies of several files", () => {
  const field = whole.fields[0]!;
  const withFields = (id: number, name: string, declination: number) =>
    changed(
      rowsOf(whole, HALF, ROWS),
      (block) => {
        block.field.fill(id);
      },
      {
        fields: [
          { ...field, id, name, declination },
          { ...field, id: id + 1, name: "Spare" },
        ],
      },
    );

  it("are one field where name and place agree, whatever the id", async () => {
    const path = await write(withFields(7, field.name, field.declination), "field7.uvfits");
    const joined = await openDataset([first, path]);
    expect(joined.fields.map(({ id, name }) => [id, name])).toEqual([
      [1, "Heron"],
      [8, "Spare"],
    ]);
    expect(new Set((await readAll(joined, { want: "rows" })).field)).toEqual(new Set([1]));
  });

  it("are two fields where they are called alike and lie apart", async () => {
    const path = await write(withFields(1, field.name, field.declination + 0.01), "apart.uvfits");
    const joined = await openDataset([first, path]);
    expect(joined.fields.map(({ id }) => id)).toEqual([1, 2, 3]);
    expect(new Set((await readAll(joined, { want: "rows" })).field)).toEqual(new Set([1, 2]));
    expect(text(joined, "field-positions-differ")).toContain("Heron");
  });

  it("are refused where the equinoxes differ", async () => {
    const other = { ...whole, fields: [{ ...field, equinox: 1950 }] };
    expect(await lineOfError(openDataset([first, await write(other, "b1950.uvfits")]))).toMatch(
      /the field "Heron" is given at equinox (1950|2000), in other files at (2000|1950)/,
    );
  });

  it("stand beside each other as setups where the frequencies differ", async () => {
    const higher = simulated({ time, frequency: { start: "1.5GHz" } }).dataset;
    const joined = await openDataset([atOnce, await write(higher, "higher.uvfits")]);
    expect(joined.setups.map(({ frequencies }) => frequencies[0])).toEqual([1.4e9, 1.5e9]);
    const { setup } = await readAll(joined, { want: "rows" });
    expect([setup[0], setup.at(-1)]).toEqual([0, 1]);
    expect(text(joined, "frequencies-side-by-side")).toContain("hold other frequencies at the same times");
    expect((await surveyDataset(joined)).totals.duplicateRows).toBe(0);
  });

  it("are refused where a row has another shape, with what to do", async () => {
    const fewer = simulated({ time, frequency: { channels: 8 } }).dataset;
    expect(await lineOfError(openDataset([first, await write(fewer, "fewer.uvfits")]))).toMatch(
      /a row holds .* \(sub-bands x channels\): expected .* as in .*\. Files of other frequencies join as setups/,
    );
  });

  it("are refused where the polarizations differ", async () => {
    const linear = simulated({ time, polarizations: ["XX", "YY"] }).dataset;
    expect(await lineOfError(openDataset([first, await write(linear, "linear.uvfits")]))).toMatch(
      /the polarizations are (XX YY|RR LL): expected (RR LL|XX YY), as in/,
    );
  });

  it("are refused where one is calibrated and the other is not", async () => {
    const raw = { ...rowsOf(whole, HALF, ROWS), unit: "uncalibrated" };
    expect(await lineOfError(openDataset([first, await write(raw, "raw.uvfits")]))).toMatch(
      /raw.uvfits: the unit of the amplitudes is "uncalibrated": expected "Jy", as in z-first.uvfits/,
    );
  });
});
