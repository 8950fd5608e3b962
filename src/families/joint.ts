import { type Claim, claimOf, criticalStatistic, ownTail, statisticOf } from "./claim.ts";
import { jointCritical, jointUpperTail } from "./joint-tail.ts";
import { misfit } from "./misfits.ts";
import type { CorrectionName, FamilyProblem, Misfit } from "./types.ts";

/** Sign patterns double with each comparison under an equivalence margin; beyond this they are not enumerated. */
const mostWithMargin = 5;

/**
 * The joint null distribution of a family's evidence.
 *
 * With one error term that all comparisons share it is exactly multivariate t: a row's score is its statistic, df the common one. With error
 * terms of their own there is no such law; then each own p, which is right on its own df, is turned into a normal score, and the scores are
 * taken as jointly normal with the correlation of the estimates (Conneely & Boehnke 2007). Margins stay exact, only their joint behaviour is approximate.
 *
 * Under an equivalence margin each null hypothesis has two ends, and which end is true for which row is unknown: the largest tail over all
 * patterns of ends is taken.
 */
export interface JointDistribution {
  readonly claim: Claim;
  readonly scores: readonly number[];
  /** df of the scores: the common one, or Infinity for normal scores. */
  readonly df: number;
  readonly exact: boolean;
  /** P(the largest score of `rows` reaches `score`) when all their null hypotheses are true, and the error of the computation. */
  upperTail(rows: readonly number[], score: number, roughly?: boolean): { readonly p: number; readonly error: number };
  /** The score that the largest of `rows` reaches with probability `error`. */
  critical(rows: readonly number[], error: number): number;
  /** Own p of a score. */
  ownP(score: number): number;
  /** The score that has this own p. */
  scoreAt(p: number): number;
  /** The row's statistic that has this score. */
  statisticAt(row: number, score: number): number;
}

/** Null when joint methods can be used: correlations known, and not too many comparisons under an equivalence margin. */
export function jointMisfit(method: CorrectionName, problem: FamilyProblem): Misfit | null {
  if (problem.correlation === null) return misfit("no-correlation", { method });
  const comparisons = problem.names.length;
  return problem.margin?.type === "equivalence" && comparisons > mostWithMargin
    ? misfit("margin-too-many", { method, comparisons, most: mostWithMargin })
    : null;
}

type Matrix = readonly (readonly number[])[];

/** Correlation matrices of all sign patterns that no other pattern is safe for. Lower correlations give a larger one-sided tail (Slepian 1962). */
function worstPatterns(correlation: Matrix): readonly Matrix[] {
  const count = correlation.length;
  const all = Array.from({ length: 2 ** (count - 1) }, (_, pattern) => {
    const sign = (i: number) => (i > 0 && (pattern >> (i - 1)) & 1 ? -1 : 1);
    return correlation.map((row, i) => row.map((value, j) => (i === j ? 1 : sign(i) * sign(j) * value)));
  });
  const covers = (a: Matrix, b: Matrix) => a.every((row, i) => row.every((value, j) => value <= b[i]![j]!));
  return all.filter(
    (one, k) => !all.some((other, l) => l !== k && covers(other, one) && !(covers(one, other) && l > k)),
  );
}

/** The joint distribution of a family that `jointMisfit` lets through. */
export function jointDistribution(problem: FamilyProblem): JointDistribution {
  const claim = claimOf(problem);
  const { correlation, commonDf } = problem;
  const exact = commonDf !== null;
  const df = commonDf ?? Number.POSITIVE_INFINITY;
  const statistics = problem.estimates.map((estimate, i) => statisticOf(claim, estimate, problem.standardErrors[i]!));
  const scores = exact
    ? statistics
    : statistics.map((statistic, i) => {
        const p = ownTail(claim, statistic, problem.df[i]!);
        return p === 0 ? Number.POSITIVE_INFINITY : criticalStatistic(claim, p, Number.POSITIVE_INFINITY);
      });
  const sides = claim.type === "two-sided" ? "two-sided" : "upper";
  const matrices = (rows: readonly number[]): readonly Matrix[] => {
    const own = rows.map((i) => rows.map((j) => correlation![i]![j]!));
    return claim.type === "equivalence" ? worstPatterns(own) : [own];
  };
  const { watch } = problem;
  return {
    claim,
    scores,
    df,
    exact,
    ownP: (score) => ownTail(claim, score, df),
    scoreAt: (p) => (p <= 0 ? Number.POSITIVE_INFINITY : criticalStatistic(claim, p, df)),
    statisticAt: (row, score) =>
      exact ? score : criticalStatistic(claim, ownTail(claim, score, df), problem.df[row]!),
    upperTail(rows, score, roughly = false) {
      if (score === Number.POSITIVE_INFINITY) return { p: 0, error: 0 };
      if (score === Number.NEGATIVE_INFINITY || (sides === "two-sided" && score <= 0)) return { p: 1, error: 0 };
      if (rows.length === 1) return { p: ownTail(claim, score, df), error: 0 };
      let largest = { p: 0, error: 0 };
      for (const matrix of matrices(rows)) {
        const { p, error } = jointUpperTail({ correlation: matrix, df, sides, limit: score, watch, roughly });
        if (p > largest.p) largest = { p, error };
      }
      return largest;
    },
    critical(rows, error) {
      if (rows.length === 1) return criticalStatistic(claim, error, df);
      return Math.max(
        ...matrices(rows).map((matrix) => jointCritical(error, { correlation: matrix, df, sides, watch })),
      );
    },
  };
}
