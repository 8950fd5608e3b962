import { fUpperQuantile, fUpperTail } from "../numeric/index.ts";
import { agreed, assembled, jointLimits, ownPByT } from "./answer.ts";
import { ownTail } from "./claim.ts";
import type { Correction } from "./correction.ts";
import { commonErrorMisfit, twoSidedMisfit } from "./members.ts";
import { misfit } from "./misfits.ts";
import { sources } from "./sources.ts";
import type { CorrectionName, FamilyProblem } from "./types.ts";

const name: CorrectionName = "scheffe";

/**
 * Dimension of the space of contrasts that are judged: all contrasts among the compared means. That is the means less one; where the
 * members are repeated over other factors, or belong to no one factor, all cells that the weights are over.
 */
export function scheffeDimension({ shape, weights }: FamilyProblem): number {
  const columns = weights[0]?.length ?? 0;
  return shape.means !== null && !shape.repeated ? shape.means - 1 : columns - 1;
}

/** Every contrast among the means, also those that nobody named. */
export const scheffe: Correction = {
  name,
  holds: "family-wise error",
  dependence: "joint distribution",
  source: ["scheffe-1953"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection among all contrasts of the means, named or not.",
    assumes: "One pooled error term, normal errors, two-sided comparisons.",
    betterThan:
      "Nothing else holds the error over contrasts chosen after seeing the data. For a list named beforehand single-step, step-down and holm are always stronger, and tukey is for all pairs.",
    source: [sources["scheffe-1953"]],
  },
  fits(problem) {
    const unfit = twoSidedMisfit(name, problem) ?? commonErrorMisfit(name, problem);
    if (unfit !== null) return unfit;
    return scheffeDimension(problem) >= 1 ? null : misfit("no-contrast-weights", { method: name });
  },
  decide(problem) {
    const { estimates, standardErrors, error } = problem;
    const p = ownPByT(problem);
    const dimension = scheffeDimension(problem);
    const df = problem.commonDf!;
    const adjustedP = estimates.map((estimate, i) => {
      if (estimate === 0) return 1;
      const t = estimate / standardErrors[i]!;
      return fUpperTail((t * t) / dimension, dimension, df);
    });
    const critical = Math.sqrt(dimension * fUpperQuantile(error, dimension, df));
    const level = ownTail({ type: "two-sided", bound: 0 }, critical, df);
    const decisions = agreed(
      p,
      adjustedP,
      p.map(() => level),
      error,
    );
    return assembled(problem, {
      p,
      ...decisions,
      limits: jointLimits(
        problem,
        p.map(() => critical),
      ),
      notes: [{ code: "contrast-space", facts: { dimension } }],
    });
  },
};
