import type { GroupRanks } from "./kruskal-wallis.ts";

/** Beyond these the counting would take longer than a moment; the large-sample p is close there. */
const mostObservations = 30;
const mostStates = 60_000;

/** Sums that agree to this share are the same value reached in another order. */
const tie = 1e-10;

/**
 * Exact P(H >= observed) when all assignments of the observed ranks (ties included) to groups of the observed sizes are equally
 * likely, by counting assignments rank by rank: the state is how many ranks each group has taken and what they sum to.
 *
 * @returns the probability, or null where there are too many states
 */
export function exactTail(facts: GroupRanks): number | null {
  const { ranks, observations, groups, n, meanRank } = facts;
  if (observations > mostObservations) return null;
  // Twice the ranks are integers, also with ties.
  const doubled = Array.from(ranks, (rank) => Math.round(2 * rank)).sort((left, right) => left - right);
  const total = doubled.reduce((sum, rank) => sum + rank, 0);
  const sizes = groups.map((cell) => n[cell]!);
  // The last group's count and sum follow from the others'.
  const free = groups.length - 1;
  const countRadix = sizes.slice(0, free).map((size) => size + 1);
  const strides: number[] = [];
  let stride = 1;
  for (const radix of countRadix) {
    strides.push(stride);
    stride *= radix;
  }
  const sumStrides: number[] = [];
  for (let group = 0; group < free; group++) {
    sumStrides.push(stride);
    stride *= total + 1;
  }
  if (stride > Number.MAX_SAFE_INTEGER) return null;

  let states = new Map<number, number>([[0, 1]]);
  for (const [taken, rank] of doubled.entries()) {
    const next = new Map<number, number>();
    const add = (key: number, ways: number) => next.set(key, (next.get(key) ?? 0) + ways);
    for (const [key, ways] of states) {
      let others = 0;
      for (let group = 0; group < free; group++) {
        const count = Math.floor(key / strides[group]!) % countRadix[group]!;
        others += count;
        if (count < sizes[group]!) add(key + strides[group]! + rank * sumStrides[group]!, ways);
      }
      if (taken - others < sizes[free]!) add(key, ways);
    }
    if (next.size > mostStates) return null;
    states = next;
  }

  const spread = (sums: readonly number[]) => sums.reduce((sum, value, group) => sum + value ** 2 / sizes[group]!, 0);
  const observed = spread(groups.map((cell) => 2 * n[cell]! * meanRank[cell]!));
  let all = 0;
  let reached = 0;
  for (const [key, ways] of states) {
    const sums = sumStrides.map((step) => Math.floor(key / step) % (total + 1));
    sums.push(total - sums.reduce((sum, value) => sum + value, 0));
    all += ways;
    if (spread(sums) >= observed * (1 - tie)) reached += ways;
  }
  return reached / all;
}
