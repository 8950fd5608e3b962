import { agreed, assembled, limitsAtThreshold, ownPByT, stepLimits } from "./answer.ts";
import type { Correction } from "./correction.ts";
import { jointDistribution, jointMisfit } from "./joint.ts";
import { jointNotes, jointSlack } from "./single-step.ts";
import { sources } from "./sources.ts";
import { leftStanding, once, steppedAdjustedP } from "./stepwise.ts";
import type { CorrectionName, FamilyAnswer, FamilyProblem } from "./types.ts";

const name: CorrectionName = "step-down";

/** Decides a family from the largest statistic down, each step among the comparisons that are left. */
function decideStepDown(problem: FamilyProblem): FamilyAnswer {
  const { error, watch } = problem;
  const joint = jointDistribution(problem);
  const { scores } = joint;
  const rows = scores.map((_, i) => i);
  const order = [...rows].sort((a, b) => scores[b]! - scores[a]! || a - b);
  const p = ownPByT(problem);
  let computationError = 0;
  const jointTailAt = (set: readonly number[], other: number) => {
    watch.checkpoint();
    const tail = joint.upperTail(set, scores[other]!);
    computationError = Math.max(computationError, tail.error);
    return Math.max(tail.p, p[other]!);
  };
  const raw = order.map((row, place) => jointTailAt(order.slice(place), row));
  const step = {
    order,
    raw,
    error,
    ownTailAt: (_: number, other: number) => joint.ownP(scores[other]!),
    jointTailAt,
  };
  const criticalOf = once((set) => {
    watch.checkpoint();
    return joint.critical(set, error);
  });
  const sets = rows.map((row) => leftStanding(step, row));
  const decisions = agreed(
    p,
    steppedAdjustedP({ order, raw }),
    sets.map((set) => joint.ownP(criticalOf(set))),
    error,
    jointSlack,
  );
  const { rejected, threshold } = decisions;
  const statistics = (set: readonly number[]) => rows.map((row) => joint.statisticAt(row, criticalOf(set)));
  const left = rows.filter((row) => !rejected[row]);
  const limits =
    joint.claim.type === "two-sided"
      ? limitsAtThreshold(problem, threshold)
      : stepLimits(problem, rejected, left.length === 0, left.length === 0 ? [] : statistics(left), statistics(rows));
  return assembled(problem, { p, ...decisions, limits, monteCarloError: computationError, notes: jointNotes(joint) });
}

/** The joint t distribution in steps. */
export const stepDown: Correction = {
  name,
  holds: "family-wise error",
  dependence: "joint distribution",
  source: ["westfall-1997", "marcus-1976", "conneely-boehnke-2007"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "Normal errors and known correlations of the comparisons. Exact with one pooled error term; where each comparison has its own, the joint distribution is approximated as for single-step, with the same small excess in small studies. The steps are free: no use is made of logical relations among the members.",
    betterThan:
      "It rejects all that single-step, tukey with equal sizes, dunnett and holm reject, and more; above hochberg and hommel when comparisons are clearly correlated. shaffer can be stronger for all pairs. For one-sided and margin claims the limits hold jointly; for two-sided ones no such limits are known, and those shown are each comparison's own.",
    source: [sources["westfall-1997"], sources["marcus-1976"], sources["conneely-boehnke-2007"]],
  },
  fits: (problem) => jointMisfit(name, problem),
  decide: decideStepDown,
};
