/**
 * Two ways to do the same work, timed in turn, each round in the other order: what the second costs over the first. A
 * machine that does other things meanwhile slows both alike.
 */

export interface Comparison {
  readonly title: string;
  readonly rounds: number;
  readonly baseline: () => void | Promise<void>;
  readonly candidate: () => void | Promise<void>;
}

export interface Ratio {
  readonly median: number;
  readonly low: number;
  readonly high: number;
}

/** Prints and returns the ratio of candidate to baseline: median and quartiles over the rounds. */
export async function compare({ title, rounds, baseline, candidate }: Comparison): Promise<Ratio> {
  await baseline();
  await candidate();
  const ratios: number[] = [];
  for (let round = 0; round < rounds; round++) {
    const order = round % 2 === 0 ? [baseline, candidate] : [candidate, baseline];
    const times = [await timed(order[0]!), await timed(order[1]!)];
    ratios.push(round % 2 === 0 ? times[1]! / times[0]! : times[0]! / times[1]!);
  }
  ratios.sort((a, b) => a - b);
  const at = (share: number) => ratios[Math.round(share * (rounds - 1))]!;
  const ratio = { median: at(0.5), low: at(0.25), high: at(0.75) };
  const [median, low, high] = [ratio.median, ratio.low, ratio.high].map((value) => value.toFixed(2));
  process.stdout.write(`${title}: ${median} times (quartiles ${low} to ${high}, ${rounds} rounds)\n`);
  return ratio;
}

async function timed(work: () => void | Promise<void>): Promise<number> {
  const start = performance.now();
  await work();
  return performance.now() - start;
}
