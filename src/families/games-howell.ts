import type { Correction } from "./correction.ts";
import { allPairsMisfit, twoSidedMisfit } from "./members.ts";
import { misfit } from "./misfits.ts";
import { sources } from "./sources.ts";
import { decideByRange } from "./tukey.ts";
import type { CorrectionName } from "./types.ts";

const name: CorrectionName = "games-howell";

/** All pairs of means with unequal variances: the studentized range at each pair's own Welch-Satterthwaite df. */
export const gamesHowell: Correction = {
  name,
  holds: "family-wise error",
  dependence: "joint distribution",
  source: ["games-howell-1976"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection among all pairs of the means, approximately.",
    assumes:
      "All pairs of one factor, independent groups, normal errors whose variances may differ, two-sided comparisons. An approximation: with small groups it can exceed the stated error a little (5.7% for groups of 7 to 16 with a threefold range of spreads, simulated); holm under unequal variances does not lean on it.",
    betterThan:
      "Where variances differ, tukey can be far off in either direction, and this holds its error closely. single-step under unequal variances takes any members.",
    source: [sources["games-howell-1976"]],
  },
  fits(problem) {
    const unfit = twoSidedMisfit(name, problem) ?? allPairsMisfit(name, problem);
    if (unfit !== null) return unfit;
    if (problem.shape.within) return misfit("within-subjects", { method: name });
    return problem.commonDf === null ? null : misfit("needs-own-errors", { method: name });
  },
  decide: (problem) => {
    const answer = decideByRange(problem, problem.shape.means!, problem.df);
    return { ...answer, notes: [{ code: "approximate-df", facts: { method: name } }, ...answer.notes] };
  },
};
