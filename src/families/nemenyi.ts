import type { Correction } from "./correction.ts";
import { allPairsMisfit, twoSidedMisfit } from "./members.ts";
import { misfit } from "./misfits.ts";
import { sources } from "./sources.ts";
import { decideByRange } from "./tukey.ts";
import type { CorrectionName } from "./types.ts";

const name: CorrectionName = "nemenyi";

/** All pairs of mean ranks by the range of normal variables. */
export const nemenyi: Correction = {
  name,
  holds: "family-wise error",
  dependence: "joint distribution",
  source: ["nemenyi-1963"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection among all pairs of the mean ranks.",
    assumes:
      "All pairs, one set of ranks with a known spread under the null hypothesis, enough subjects for the normal limit, two-sided comparisons.",
    betterThan:
      "It is tukey for ranks: stronger than dunn for all pairs. conover estimates the spread from the ranks and goes in steps, and is usually stronger when differences are large.",
    source: [sources["nemenyi-1963"]],
  },
  fits(problem) {
    if (problem.ranks !== true) return misfit("needs-ranks", { method: name });
    return twoSidedMisfit(name, problem) ?? allPairsMisfit(name, problem);
  },
  decide: (problem) => {
    const limit = problem.names.map(() => Number.POSITIVE_INFINITY);
    return decideByRange({ ...problem, df: limit }, problem.shape.means!, limit);
  },
};
