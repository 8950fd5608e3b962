import { studentizedRangeUpperQuantile, studentizedRangeUpperTail } from "../numeric/index.ts";
import { agreed, assembled, jointLimits, ownPByT } from "./answer.ts";
import { ownTail } from "./claim.ts";
import type { Correction } from "./correction.ts";
import { allPairsMisfit, commonErrorMisfit, twoSidedMisfit } from "./members.ts";
import { sources } from "./sources.ts";
import type { CorrectionName, FamilyAnswer, FamilyProblem } from "./types.ts";

const name: CorrectionName = "tukey";
const twoSided = { type: "two-sided", bound: 0 } as const;

/**
 * Decides all pairs of `means` by the studentized range: |t| times the square root of 2 is a range of two of them, whatever the sizes
 * (Kramer 1956; conservative when they differ: Hayter 1984).
 * @param dfOf  df of the range of each row
 */
export function decideByRange(problem: FamilyProblem, means: number, dfOf: readonly number[]): FamilyAnswer {
  const { error, estimates, standardErrors } = problem;
  const adjustedP = estimates.map((estimate, i) => {
    if (estimate === 0) return 1;
    return studentizedRangeUpperTail(Math.SQRT2 * Math.abs(estimate / standardErrors[i]!), means, dfOf[i]!);
  });
  // Rows share their df more often than not; the quantile is the dear part.
  const quantiles = new Map<number, number>();
  const critical = dfOf.map((df) => {
    const known = quantiles.get(df) ?? studentizedRangeUpperQuantile(error, means, df) / Math.SQRT2;
    quantiles.set(df, known);
    return known;
  });
  const p = ownPByT(problem);
  const threshold = critical.map((value, i) => ownTail(twoSided, value, problem.df[i]!));
  return assembled(problem, { p, ...agreed(p, adjustedP, threshold, error), limits: jointLimits(problem, critical) });
}

/** All pairs of means by the studentized range, any group sizes (Tukey-Kramer). */
export const tukey: Correction = {
  name,
  holds: "family-wise error",
  dependence: "joint distribution",
  source: ["tukey-1953", "kramer-1956", "hayter-1984"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection among all pairs of the means.",
    assumes:
      "All pairs of one factor, one pooled error term (equal variances; within subjects: sphericity), normal errors, two-sided comparisons. Exact with equal group sizes, on the safe side with unequal ones (Hayter 1984).",
    betterThan:
      "With joint intervals for all pairs nothing is stronger where sizes are equal; with unequal sizes single-step is exact. step-down and shaffer reject more but have no joint intervals of both sides. Fewer comparisons than all pairs are better served by dunnett, single-step or holm; unequal variances by games-howell.",
    source: [sources["tukey-1953"], sources["kramer-1956"], sources["hayter-1984"]],
  },
  fits: (problem) => twoSidedMisfit(name, problem) ?? allPairsMisfit(name, problem) ?? commonErrorMisfit(name, problem),
  decide: (problem) =>
    decideByRange(
      problem,
      problem.shape.means!,
      problem.names.map(() => problem.commonDf!),
    ),
};
