import { reaches } from "./answer.ts";

/**
 * Shares of the error and where they go. `weights[i]` is the share that hypothesis i holds; when it is rejected, `passes[i][j]` of it goes
 * to j. What a row leaves over goes to `exits[i]`, a distribution over hypotheses of later families, or is lost where it is null.
 * `exits` also takes everything once a hypothesis has nobody left to pass to (the limit of passing a vanishing share outwards).
 */
export interface PassingGraph {
  readonly weights: readonly number[];
  readonly passes: readonly (readonly number[])[];
  readonly exits?: readonly (readonly number[] | null)[];
}

/** The state of a graph while hypotheses are taken out of it. */
interface Running {
  readonly weights: number[];
  readonly passes: number[][];
  readonly exits: (number[] | null)[];
  readonly alive: boolean[];
}

/** Two hypotheses that pass everything to each other form a closed loop; nearer to it than rounding counts as closed. */
const closedLoop = 1 - 1e-9;

/** Passing shares with what is left over sent out. */
export function openedPasses({ passes, exits }: PassingGraph): number[][] {
  return passes.map((row, i) => {
    const left = 1 - row.reduce((sum, share) => sum + share, 0);
    const exit = exits?.[i] ?? null;
    return exit === null || left < 1e-12 ? [...row] : row.map((share, j) => share + left * exit[j]!);
  });
}

function started(graph: PassingGraph): Running {
  return {
    weights: [...graph.weights],
    passes: openedPasses(graph),
    exits: graph.weights.map((_, i) => {
      const exit = graph.exits?.[i] ?? null;
      return exit === null ? null : [...exit];
    }),
    alive: graph.weights.map(() => true),
  };
}

/**
 * Takes a rejected hypothesis out: its share passes on, and what others would have passed to it passes through it.
 * @source bretz-2009, algorithm 1
 */
function takeOut(state: Running, gone: number): void {
  const { weights, passes, exits, alive } = state;
  const count = weights.length;
  const from = passes[gone]!;
  alive[gone] = false;
  const through = (row: number[], l: number) => {
    const loop = row[gone]! * from[l]!;
    return row.map((share, k) =>
      !alive[k] || k === l || loop >= closedLoop ? 0 : (share + row[gone]! * from[k]!) / (1 - loop),
    );
  };
  for (let l = 0; l < count; l++) {
    if (!alive[l]) continue;
    weights[l]! += weights[gone]! * from[l]!;
    const exit = exits[l] ?? null;
    if (exit !== null) exits[l] = through(exit, l);
    const closed = passes[l]![gone]! * from[l]! >= closedLoop;
    passes[l] = closed && exits[l] !== null ? [...exits[l]!] : through(passes[l]!, l);
  }
  weights[gone] = 0;
}

/** p over share; a hypothesis that holds no share of the error cannot be rejected, whatever its p. */
const ratio = (p: number, weight: number) => (weight > 0 ? p / weight : Number.POSITIVE_INFINITY);

/**
 * Adjusted p of a graph: whichever hypothesis has the smallest p over its share is taken out next.
 * @source bretz-2009, algorithm 2
 */
export function graphAdjustedP(p: readonly number[], graph: PassingGraph): number[] {
  const state = started(graph);
  const adjustedP = new Array<number>(p.length).fill(1);
  let largest = 0;
  for (let step = 0; step < p.length; step++) {
    let next = -1;
    let smallest = Number.POSITIVE_INFINITY;
    for (let i = 0; i < p.length; i++) {
      const value = state.alive[i] ? ratio(p[i]!, state.weights[i]!) : Number.POSITIVE_INFINITY;
      if (value < smallest) [next, smallest] = [i, value];
    }
    if (next === -1) break;
    largest = Math.max(largest, Math.min(1, smallest));
    adjustedP[next] = largest;
    takeOut(state, next);
  }
  return adjustedP;
}

/** Takes out everything that is rejected at `error`, except one row that is kept in; what shares remain. */
function settled(p: readonly number[], graph: PassingGraph, error: number, keep: number): Running {
  const state = started(graph);
  for (;;) {
    const next = p.findIndex(
      (value, i) => i !== keep && state.alive[i] && reaches(ratio(value, state.weights[i]!), error),
    );
    if (next === -1) return state;
    takeOut(state, next);
  }
}

/**
 * Thresholds of a graph. The order of rejections does not matter, so a row waits until the others have been rejected as far as they go
 * without it; the share it then holds is the most it can get. Null where that share is nothing.
 */
export function graphThreshold(p: readonly number[], graph: PassingGraph, error: number): (number | null)[] {
  return p.map((_, row) => {
    const share = settled(p, graph, error, row).weights[row]!;
    return share > 0 ? share * error : null;
  });
}

/** Which hypotheses a graph rejects. */
export function graphRejections(p: readonly number[], graph: PassingGraph, error: number): boolean[] {
  return settled(p, graph, error, -1).alive.map((alive) => !alive);
}

/** Levels that remain with the hypotheses that were not rejected, as shares of the error; 0 for the rejected ones. */
export function finalWeights(p: readonly number[], graph: PassingGraph, error: number): readonly number[] {
  return settled(p, graph, error, -1).weights;
}

/** The graph of Holm's method: equal shares, passed on in equal parts. */
export function equalGraph(count: number): PassingGraph {
  const share = count > 1 ? 1 / (count - 1) : 0;
  const index = Array.from({ length: count }, (_, i) => i);
  return {
    weights: index.map(() => 1 / count),
    passes: index.map((i) => index.map((j) => (i === j ? 0 : share))),
  };
}

/** The graph of Bonferroni's method: equal shares that stay where they are. */
export function unpassedGraph(count: number): PassingGraph {
  return {
    weights: new Array<number>(count).fill(1 / count),
    passes: Array.from({ length: count }, () => new Array<number>(count).fill(0)),
  };
}

/** The graph of an order: each hypothesis passes all it has to the next. */
export function chainGraph(weights: readonly number[]): PassingGraph {
  return { weights, passes: weights.map((_, i) => weights.map((__, j) => (j === i + 1 ? 1 : 0))) };
}
