import { agreed, assembled, limitsAtThreshold, reaches } from "./answer.ts";
import type { Correction } from "./correction.ts";
import { ascendingOrder } from "./ordering.ts";
import { sources } from "./sources.ts";

/**
 * The largest number k of comparisons whose k largest p the Simes test does not reject: p_(m-k+l) > l * error / k for all l.
 * Zero when even the largest p is at most the error. `ascending` is sorted.
 * @source hommel-1988
 */
export function hommelNumber(ascending: readonly number[], error: number): number {
  const count = ascending.length;
  for (let k = count; k >= 1; k--) {
    let stands = true;
    for (let l = 1; l <= k && stands; l++) stands = !reaches((k * ascending[count - k + l - 1]!) / l, error);
    if (stands) return k;
  }
  return 0;
}

/**
 * Hommel's adjusted p: the largest Simes p over all sets of comparisons that hold the row. For a set of k the largest is reached with the
 * row and the k - 1 largest others, so a sweep over k is enough (checked against the full closure).
 * @source hommel-1988
 */
export function hommelAdjustedP(p: readonly number[]): number[] {
  const count = p.length;
  const order = ascendingOrder(p);
  const sorted = order.map((row) => p[row]!);
  const adjusted = [...sorted];
  for (let k = 2; k <= count; k++) {
    // Simes over the k - 1 largest p, at the places 2..k of a set of k.
    let largestSet = Number.POSITIVE_INFINITY;
    for (let l = 2; l <= k; l++) largestSet = Math.min(largestSet, (k * sorted[count - k + l - 1]!) / l);
    // A row outside the k - 1 largest takes place 1 of its set.
    for (let place = 0; place <= count - k; place++)
      adjusted[place] = Math.max(adjusted[place]!, Math.min(largestSet, k * sorted[place]!));
    // A row among them belongs to the set of the k largest, or to a smaller one already seen; place 1 is then the k-th largest.
    const whole = Math.min(largestSet, k * sorted[count - k]!);
    for (let place = count - k + 1; place < count; place++) adjusted[place] = Math.max(adjusted[place]!, whole);
  }
  const adjustedP = new Array<number>(count);
  for (const [place, row] of order.entries()) adjustedP[row] = Math.min(1, adjusted[place]!);
  return adjustedP;
}

/**
 * The decision for a row changes only where its p crosses one of the Simes levels l * error / k, and once only, so the threshold is the
 * largest of them at which the row is still rejected.
 */
export function hommelThreshold(p: readonly number[], error: number): number[] {
  const count = p.length;
  const levels: number[] = [];
  for (let k = 1; k <= count; k++) for (let l = 1; l <= k; l++) levels.push((l * error) / k);
  const candidates = [...new Set(levels)].sort((a, b) => a - b);
  const order = ascendingOrder(p);
  return p.map((_, row) => {
    const others = order.filter((other) => other !== row).map((other) => p[other]!);
    const rejects = (level: number) => {
      const place = others.findIndex((value) => value > level);
      const at = place === -1 ? others.length : place;
      const largest = hommelNumber([...others.slice(0, at), level, ...others.slice(at)], error);
      return largest === 0 || reaches(largest * level, error);
    };
    let [low, high] = [0, candidates.length - 1];
    while (low < high) {
      const middle = (low + high + 1) >> 1;
      if (rejects(candidates[middle]!)) low = middle;
      else high = middle - 1;
    }
    return candidates[low]!;
  });
}

/** The closure of the Simes test. */
export const hommel: Correction = {
  name: "hommel",
  holds: "family-wise error",
  dependence: "independent or positive",
  source: ["hommel-1988", "sarkar-1998"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "Independent or positively dependent comparisons, so that the Simes inequality holds (Sarkar 1998). Comparisons against one level are; all pairs and contrasts of opposite sign need not be, and then holm is the safe choice.",
    betterThan:
      "It rejects all that hochberg and holm reject, and more: it is the whole closure of the Simes test. step-down can be stronger when comparisons are strongly correlated. No joint limits agree with it; those shown are each comparison's own.",
    source: [sources["hommel-1988"], sources["sarkar-1998"]],
  },
  fits: () => null,
  decide(problem) {
    const { p, error } = problem;
    const adjustedP = hommelAdjustedP(p);
    const decisions = agreed(p, adjustedP, hommelThreshold(p, error), error);
    return assembled(problem, {
      ...decisions,
      limits: limitsAtThreshold(problem, decisions.threshold),
      notes: problem.names.length > 1 ? [{ code: "needs-positive-dependence", facts: { method: "hommel" } }] : [],
    });
  },
};
