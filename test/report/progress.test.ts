import { describe, expect, it } from "vitest";
import { createProgress } from "../../src/report/progress.ts";

const ERASE = "\r\u001b[2K";

function terminal(columns = 80): {
  stream: { isTTY: boolean; columns: number; write(text: string): void };
  written: string[];
} {
  const written: string[] = [];
  return { stream: { isTTY: true, columns, write: (text) => written.push(text) }, written };
}

describe("createProgress", () => {
  it("writes nothing where there is no terminal", () => {
    const written: string[] = [];
    const progress = createProgress({ write: (text) => written.push(text) }, {});
    progress.stage("Surveying", 0.5);
    progress.end();
    expect(written).toEqual([]);
  });

  it("writes nothing to a terminal that cannot erase a line", () => {
    const { stream, written } = terminal();
    createProgress(stream, { TERM: "dumb" }).stage("Surveying", 0.5);
    expect(written).toEqual([]);
  });

  it("draws the stage, its share and a bar on one line, and erases it at the end", () => {
    const { stream, written } = terminal();
    const progress = createProgress(stream, { NO_COLOR: "1" });
    progress.stage("Surveying", 0.5);
    progress.end();
    expect(written).toEqual([`${ERASE}[############------------]  50 %  Surveying`, ERASE]);
  });

  it("draws again only when something changes on the screen", () => {
    const { stream, written } = terminal();
    const progress = createProgress(stream, { NO_COLOR: "1" });
    progress.stage("Surveying", 0.501);
    progress.stage("Surveying", 0.502);
    progress.stage("Surveying", 0.51);
    expect(written).toHaveLength(2);
  });

  it("colours unless NO_COLOR says not to; an empty NO_COLOR says nothing", () => {
    const { stream, written } = terminal();
    createProgress(stream, { NO_COLOR: "" }).stage("Surveying", 0);
    createProgress(stream, { NO_COLOR: "yes" }).stage("Surveying", 0);
    expect(written[0]).toContain("\u001b[36m");
    expect(written[1]).not.toContain("\u001b[36m");
  });

  it("never draws a line that the terminal would break, nor what a name would do to it", () => {
    for (const columns of [1, 2, 9, 20, 40]) {
      const { stream, written } = terminal(columns);
      createProgress(stream, { NO_COLOR: "1" }).stage("Surveying\u001b[2J 漢字漢字漢字", 1);
      const line = (written[0] ?? ERASE).slice(ERASE.length);
      expect(line.length).toBeLessThan(Math.max(columns, 1));
      expect(line).not.toContain("\u001b");
    }
  });

  it("takes shares outside 0 to 1 for the nearest, and no number for none", () => {
    const { stream, written } = terminal();
    const progress = createProgress(stream, { NO_COLOR: "1" });
    for (const share of [-1, 7, Number.NaN]) progress.stage("Surveying", share);
    expect(written.map((line) => line.slice(ERASE.length + 27, ERASE.length + 32))).toEqual([
      "  0 %",
      "100 %",
      "  0 %",
    ]);
  });

  it("draws nothing after its end", () => {
    const { stream, written } = terminal();
    const progress = createProgress(stream, {});
    progress.end();
    progress.end();
    progress.stage("Late", 0.1);
    expect(written).toEqual([]);
  });
});
