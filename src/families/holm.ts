import { agreed, assembled, criticalAt, limitsAtThreshold, reaches, stepLimits } from "./answer.ts";
import { claimOf } from "./claim.ts";
import type { Correction } from "./correction.ts";
import { ascendingOrder, withoutIndex } from "./ordering.ts";
import { equalGraph } from "./passing-graph.ts";
import { sources } from "./sources.ts";
import type { FamilyProblem } from "./types.ts";

/**
 * Holm's adjusted p: in ascending order each p times the number of comparisons still undecided, never below an earlier one.
 * @source holm-1979
 */
export function holmAdjustedP(p: readonly number[]): number[] {
  const adjustedP = new Array<number>(p.length);
  let largest = 0;
  for (const [rank, row] of ascendingOrder(p).entries()) {
    largest = Math.max(largest, Math.min(1, (p.length - rank) * p[row]!));
    adjustedP[row] = largest;
  }
  return adjustedP;
}

/** The level that is left for a row when the others have been rejected as far as they go without it. */
export function holmThreshold(p: readonly number[], error: number): number[] {
  const order = ascendingOrder(p);
  return p.map((_, row) => {
    let passed = 0;
    for (const other of withoutIndex(order, row)) {
      if (!reaches((p.length - passed) * p[other]!, error)) break;
      passed++;
    }
    return error / (p.length - passed);
  });
}

/** Limits of Bonferroni's steps: joint for directed claims, at each row's threshold for two-sided ones. */
export function holmLimits(
  problem: FamilyProblem,
  rejected: readonly boolean[],
  threshold: readonly (number | null)[],
) {
  if (claimOf(problem).type === "two-sided") return limitsAtThreshold(problem, threshold);
  const count = problem.names.length;
  const undecided = rejected.filter((it) => !it).length;
  const levels = (over: number) => criticalAt(problem, new Array<number>(count).fill(problem.error / over));
  return stepLimits(problem, rejected, undecided === 0, undecided === 0 ? [] : levels(undecided), levels(count));
}

/** Bonferroni's test in steps, the smallest p first. */
export const holm: Correction = {
  name: "holm",
  holds: "family-wise error",
  dependence: "any",
  source: ["holm-1979", "strassburger-bretz-2008"],
  passing: ({ names }) => equalGraph(names.length),
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes: "Only that each comparison's own p is right; any dependence between comparisons.",
    betterThan:
      "It rejects all that bonferroni rejects, and more, at no price. hochberg and hommel reject more but need independent or positively dependent comparisons; step-down uses the correlations; shaffer uses logical relations. For one-sided and margin claims the limits hold jointly (Strassburger & Bretz 2008); for two-sided ones no such limits are known, and those shown are each comparison's own.",
    source: [sources["holm-1979"], sources["strassburger-bretz-2008"]],
  },
  fits: () => null,
  decide(problem) {
    const { p, error } = problem;
    const adjustedP = holmAdjustedP(p);
    const decisions = agreed(p, adjustedP, holmThreshold(p, error), error);
    return assembled(problem, { ...decisions, limits: holmLimits(problem, decisions.rejected, decisions.threshold) });
  },
};
