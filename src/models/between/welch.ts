import type { CellStatistics } from "../../design/types.ts";
import { fUpperTail } from "../../numeric/index.ts";
import { type BetweenAnalysis, cellName, emptyCellNotes, type GroupNaming } from "./analysis.ts";
import { filledCells, observationsOf } from "./cell-statistics.ts";
import { exactSum } from "./compensated-sum.ts";
import { betweenGroups } from "./one-way.ts";
import { requireOwnVariances, requireTwoGroups } from "./refusals.ts";

interface OwnVariances {
  readonly cells: readonly number[];
  readonly n: readonly number[];
  readonly mean: readonly number[];
  readonly variance: readonly number[];
}

function ownVariances(statistics: CellStatistics, naming: GroupNaming): OwnVariances {
  requireTwoGroups(statistics);
  const cells = filledCells(statistics);
  requireOwnVariances(statistics, cells, (cell) => cellName(naming, cell));
  return {
    cells,
    n: cells.map((cell) => statistics.n[cell]!),
    mean: cells.map((cell) => statistics.mean[cell]!),
    variance: cells.map((cell) => statistics.sumOfSquares[cell]! / (statistics.n[cell]! - 1)),
  };
}

/**
 * Welch's test of equal means when each group has its own variance.
 * @throws ModelError "too-few-groups", "group-of-one", "group-without-variance"
 * @source welch-1951 (Biometrika 38, 330-336)
 */
export function welchAnalysis(statistics: CellStatistics, options: GroupNaming = {}): BetweenAnalysis {
  const { n, mean, variance } = ownVariances(statistics, options);
  const groups = n.length;
  const weights = n.map((size, group) => size / variance[group]!);
  const weight = exactSum(weights);
  const centre = exactSum(weights.map((value, group) => value * mean[group]!)) / weight;
  const between = exactSum(weights.map((value, group) => value * (mean[group]! - centre) ** 2)) / (groups - 1);
  const unevenness = exactSum(weights.map((value, group) => (1 - value / weight) ** 2 / (n[group]! - 1)));
  const value = between / (1 + (2 * (groups - 2) * unevenness) / (groups ** 2 - 1));
  const df2 = (groups ** 2 - 1) / (3 * unevenness);
  return {
    method: "welch",
    effects: [
      {
        effect: options.effect ?? "group",
        method: "welch",
        statistic: "F",
        value,
        df1: groups - 1,
        df2,
        p: fUpperTail(value, groups - 1, df2),
      },
    ],
    observations: observationsOf(statistics),
    notes: emptyCellNotes(statistics.n, options),
  };
}

/**
 * Brown and Forsythe's F* for equal means when each group has its own variance: the sum of squares between groups over its
 * expectation when the means are equal. The denominator's df are Satterthwaite's, the numerator's groups - 1 as in the paper
 * (Mehrotra's later correction of the numerator's df is not applied).
 * @throws ModelError "too-few-groups", "group-of-one", "group-without-variance"
 * @source brown-forsythe-1974 (Technometrics 16, 129-132)
 */
export function brownForsytheAnalysis(statistics: CellStatistics, options: GroupNaming = {}): BetweenAnalysis {
  const { n, variance } = ownVariances(statistics, options);
  const observations = observationsOf(statistics);
  const parts = n.map((size, group) => (1 - size / observations) * variance[group]!);
  const expected = exactSum(parts);
  const value = betweenGroups(statistics).sumOfSquares / expected;
  const df2 = 1 / exactSum(parts.map((part, group) => (part / expected) ** 2 / (n[group]! - 1)));
  return {
    method: "brown-forsythe",
    effects: [
      {
        effect: options.effect ?? "group",
        method: "brown-forsythe",
        statistic: "F",
        value,
        df1: n.length - 1,
        df2,
        p: fUpperTail(value, n.length - 1, df2),
      },
    ],
    observations,
    notes: emptyCellNotes(statistics.n, options),
  };
}
