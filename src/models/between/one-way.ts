import type { CellStatistics } from "../../design/types.ts";
import { type BetweenAnalysis, emptyCellNotes, type GroupNaming } from "./analysis.ts";
import { observationsOf, pooledError } from "./cell-statistics.ts";
import { addTo, exactProductSum, newSum, totalOf } from "./compensated-sum.ts";
import { requireErrorDf, requireTwoGroups, requireVariance } from "./refusals.ts";
import { testedEffect } from "./tested-effect.ts";

/** Sum of squares between groups around the grand mean of all observations, and that mean (of the offsets). */
export function betweenGroups(statistics: CellStatistics): { readonly sumOfSquares: number; readonly mean: number } {
  const mean = exactProductSum(statistics.n, statistics.mean) / observationsOf(statistics);
  const total = newSum();
  const rest = newSum();
  for (let cell = 0; cell < statistics.n.length; cell++) {
    const deviation = statistics.mean[cell]! - mean;
    addTo(total, statistics.n[cell]! * deviation * deviation);
    addTo(rest, statistics.n[cell]! * deviation);
  }
  return { sumOfSquares: totalOf(total) - totalOf(rest) ** 2 / observationsOf(statistics), mean };
}

/**
 * One-way analysis of variance: each filled cell is a group, all with one variance.
 *
 * @param statistics counts, means and sums of squares of the groups, of any size
 * @param options.level of the interval of partial eta squared, default 0.95; null leaves it out (simulations)
 * @param options.measured true for an attribute that nobody assigned; it makes no difference to one factor alone
 * @throws ModelError "too-few-groups", "no-error-df", "zero-variance"
 * @source fisher-1925 (Statistical Methods for Research Workers); checked on NIST StRD
 */
export function oneWayAnalysis(
  statistics: CellStatistics,
  options: GroupNaming & { readonly level?: number | null } = {},
): BetweenAnalysis {
  requireTwoGroups(statistics);
  const error = pooledError(statistics);
  requireErrorDf(error.df);
  requireVariance(statistics, error);
  const { sumOfSquares } = betweenGroups(statistics);
  const groups = statistics.n.reduce((count, size) => count + (size > 0 ? 1 : 0), 0);
  const observations = observationsOf(statistics);
  const share = sumOfSquares / (sumOfSquares + error.sumOfSquares);
  return {
    method: "one-way",
    effects: [
      testedEffect({
        effect: options.effect ?? "group",
        method: "one-way",
        df: groups - 1,
        sumOfSquares,
        error,
        observations,
        level: options.level === undefined ? 0.95 : options.level,
        generalizedEtaSquared: share,
      }),
    ],
    error,
    rSquared: share,
    residualSd: Math.sqrt(error.meanSquare),
    observations,
    notes: emptyCellNotes(statistics.n, options),
  };
}
