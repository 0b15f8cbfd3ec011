/** The scoreboard as a table: one line a case, over its seeds. */
import type { Case } from "./cases.ts";
import { playCase, type Score } from "./score.ts";

export interface Line {
  readonly game: Case;
  readonly scores: readonly Score[];
}

export async function playAll(
  cases: readonly Case[],
  seeds: readonly number[],
  told: (line: Line) => void = () => {},
): Promise<Line[]> {
  const lines: Line[] = [];
  for (const game of cases) {
    const scores: Score[] = [];
    for (const seed of seeds) scores.push(await playCase(game, seed));
    const line = { game, scores };
    lines.push(line);
    told(line);
  }
  return lines;
}

const HEAD =
  "| case | recall | precision | flagged % | selections | named | false alarms | of best | jumps exact | size in 3 sigma |\n" +
  "| --- | --- | --- | --- | --- | --- | --- | --- | --- | --- |";

/** Markdown. Recall and precision are the worst of the seeds, false alarms events over all of them. */
export function tableOf(lines: readonly Line[]): string {
  return [HEAD, ...lines.map(rowOf)].join("\n");
}

export function rowOf({ game, scores }: Line): string {
  const known = (values: number[]) => values.filter((value) => !Number.isNaN(value));
  const worst = (pick: (score: Score) => number) => {
    const values = known(scores.map(pick));
    return values.length === 0 ? "" : Math.min(...values).toFixed(3);
  };
  const sum = (pick: (score: Score) => number) => scores.reduce((total, score) => total + pick(score), 0);
  const jumps = scores.flatMap((score) => score.jumps);
  const faults = sum((score) => score.faults);
  const efficiencies = known(scores.map((score) => score.efficiency));
  const share = (count: number) => (jumps.length === 0 ? "" : `${count}/${jumps.length}`);
  return `| ${[
    game.name,
    worst((score) => score.recall),
    worst((score) => score.precision),
    (100 * Math.max(...scores.map((score) => score.flagged))).toFixed(2),
    (sum((score) => score.selections) / scores.length).toFixed(1),
    faults === 0 ? "" : `${sum((score) => score.named)}/${faults}`,
    sum((score) => score.falseAlarms),
    efficiencies.length === 0 ? "" : Math.min(...efficiencies).toFixed(2),
    share(jumps.filter(({ integrations }) => integrations <= 1).length),
    share(jumps.filter(({ sigmas }) => sigmas <= 3).length),
  ].join(" | ")} |`;
}
