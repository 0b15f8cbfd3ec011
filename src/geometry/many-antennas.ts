/** Differences of very many antennas' quantities, turned back into those without a matrix of antennas by antennas. */
import type { Graph } from "./antenna-coordinates.ts";

/** Relative size of what may be left of the equations. */
const LEFT = 1e-14;
/** Iterations; baselines chosen evenly need some thirty, a chain of antennas as many as it has antennas. */
const MOST_ITERATIONS = 3000;

/** The sums over baselines that least squares of differences need: weighted degrees, and what touches what. */
export class DifferenceEquations {
  private readonly graph: Graph;
  private readonly weight: ArrayLike<number>;
  private readonly degree: Float64Array;

  /** @param degree (antennas) sum of the weights of its pairs */
  constructor(graph: Graph, weight: ArrayLike<number>, degree: Float64Array) {
    this.graph = graph;
    this.weight = weight;
    this.degree = degree;
  }

  /** Whether pairs lead from every antenna that has any to every other. */
  get isConnected(): boolean {
    const { graph, weight, degree } = this;
    const leader = Int32Array.from(degree.keys());
    const leaderOf = (antenna: number): number => {
      let top = antenna;
      while (leader[top] !== top) {
        leader[top] = leader[leader[top]!]!;
        top = leader[top]!;
      }
      return top;
    };
    for (let p = 0; p < graph.first.length; p++) {
      if (weight[p] !== 0) leader[leaderOf(graph.first[p]!)] = leaderOf(graph.second[p]!);
    }
    let groups = 0;
    for (let i = 0; i < degree.length; i++) if (degree[i]! > 0 && leader[i] === i) groups += 1;
    return groups === 1;
  }

  /**
   * Conjugate gradients, each antenna's equation over its degree (Hestenes & Stiefel 1952, J. Res. NBS 49, 409).
   *
   * @param values (pairs)
   * @returns (antennas) with mean 0 over those that have a pair, 0 for the others
   */
  solve(values: ArrayLike<number>): Float64Array {
    const { degree } = this;
    const n = degree.length;
    const x = new Float64Array(n);
    const rest = this.rightSide(values);
    const scaled = rest.map((value, i) => (degree[i]! > 0 ? value / degree[i]! : 0));
    const step = scaled.slice();
    let size = dot(rest, scaled);
    const enough = size * LEFT * LEFT;
    for (let round = 0; round < MOST_ITERATIONS && size > enough; round++) {
      const moved = this.times(step);
      const length = size / dot(step, moved);
      if (!Number.isFinite(length)) break;
      for (let i = 0; i < n; i++) {
        x[i]! += length * step[i]!;
        rest[i]! -= length * moved[i]!;
        scaled[i] = degree[i]! > 0 ? rest[i]! / degree[i]! : 0;
      }
      const next = dot(rest, scaled);
      for (let i = 0; i < n; i++) step[i] = scaled[i]! + (next / size) * step[i]!;
      size = next;
    }
    return this.centred(x);
  }

  private rightSide(values: ArrayLike<number>): Float64Array {
    const { graph, weight, degree } = this;
    const right = new Float64Array(degree.length);
    for (let p = 0; p < graph.first.length; p++) {
      if (weight[p] === 0) continue;
      right[graph.first[p]!]! += weight[p]! * values[p]!;
      right[graph.second[p]!]! -= weight[p]! * values[p]!;
    }
    return right;
  }

  private times(x: Float64Array): Float64Array {
    const { graph, weight, degree } = this;
    const out = x.map((value, i) => value * degree[i]!);
    for (let p = 0; p < graph.first.length; p++) {
      const [i, j] = [graph.first[p]!, graph.second[p]!];
      out[i]! -= weight[p]! * x[j]!;
      out[j]! -= weight[p]! * x[i]!;
    }
    return out;
  }

  private centred(x: Float64Array): Float64Array {
    const { degree } = this;
    let sum = 0;
    let used = 0;
    for (let i = 0; i < x.length; i++) {
      if (!(degree[i]! > 0)) continue;
      sum += x[i]!;
      used += 1;
    }
    return x.map((value, i) => (degree[i]! > 0 ? value - sum / used : 0));
  }
}

function dot(a: Float64Array, b: Float64Array): number {
  let sum = 0;
  for (let i = 0; i < a.length; i++) sum += a[i]! * b[i]!;
  return sum;
}
