import type { SubjectRanks } from "./friedman.ts";

const mostCells = 6;
const mostSteps = 3_000_000;
const tie = 1e-10;

/** Every distinct order of a list, once each. */
function distinctOrders(values: readonly number[]): number[][] {
  const left = new Map<number, number>();
  for (const value of values) left.set(value, (left.get(value) ?? 0) + 1);
  const orders: number[][] = [];
  const current: number[] = [];
  const place = () => {
    if (current.length === values.length) {
      orders.push([...current]);
      return;
    }
    for (const [value, count] of left) {
      if (count === 0) continue;
      left.set(value, count - 1);
      current.push(value);
      place();
      current.pop();
      left.set(value, count);
    }
  };
  place();
  return orders;
}

/**
 * Exact P(Q >= observed) when every order of each subject's ranks (ties included) is equally likely, by adding subjects one at a
 * time. Rank sums that differ only in which condition has which sum stay together, since every later subject treats all alike.
 *
 * @returns the probability, or null where counting would take too long
 */
export function exactFriedmanTail(facts: SubjectRanks): number | null {
  const { subjects, cells, ranks, meanRank } = facts;
  if (cells > mostCells) return null;
  const radix = 2 * subjects * cells + 1;
  if (radix ** cells > Number.MAX_SAFE_INTEGER) return null;
  const keyOf = (sums: readonly number[]) => sums.reduce((key, sum) => key * radix + sum, 0);
  const sumsOf = (key: number) => {
    const sums = new Array<number>(cells);
    let rest = key;
    for (let cell = cells - 1; cell >= 0; cell--) {
      sums[cell] = rest % radix;
      rest = Math.floor(rest / radix);
    }
    return sums;
  };
  let states = new Map<number, number>([[0, 1]]);
  let steps = 0;
  const ordersOf = new Map<string, number[][]>();
  for (let subject = 0; subject < subjects; subject++) {
    const line = Array.from(ranks.subarray(subject * cells, (subject + 1) * cells), (rank) => Math.round(2 * rank));
    const pattern = [...line].sort((left, right) => left - right).join();
    const orders = ordersOf.get(pattern) ?? distinctOrders(line);
    ordersOf.set(pattern, orders);
    steps += states.size * orders.length;
    if (steps > mostSteps) return null;
    const next = new Map<number, number>();
    for (const [key, share] of states) {
      const sums = sumsOf(key);
      for (const order of orders) {
        const sorted = sums.map((sum, cell) => sum + order[cell]!).sort((left, right) => left - right);
        const nextKey = keyOf(sorted);
        next.set(nextKey, (next.get(nextKey) ?? 0) + share / orders.length);
      }
    }
    states = next;
  }
  const spread = (sums: readonly number[]) =>
    sums.reduce((sum, value) => sum + (value - subjects * (cells + 1)) ** 2, 0);
  const observed = spread(Array.from(meanRank, (rank) => 2 * subjects * rank));
  let all = 0;
  let reached = 0;
  for (const [key, share] of states) {
    all += share;
    if (spread(sumsOf(key)) >= observed * (1 - tie)) reached += share;
  }
  return reached / all;
}
