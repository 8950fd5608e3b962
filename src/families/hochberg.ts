import { agreed, assembled, limitsAtThreshold, reaches } from "./answer.ts";
import type { Correction } from "./correction.ts";
import { ascendingOrder, withoutIndex } from "./ordering.ts";
import { sources } from "./sources.ts";

/**
 * Hochberg's adjusted p: from the largest p down, each times the number of p at least as large, never above a later one.
 * @source hochberg-1988
 */
export function hochbergAdjustedP(p: readonly number[]): number[] {
  const adjustedP = new Array<number>(p.length);
  let smallest = 1;
  for (const [step, row] of ascendingOrder(p).reverse().entries()) {
    smallest = Math.min(smallest, (step + 1) * p[row]!);
    adjustedP[row] = smallest;
  }
  return adjustedP;
}

/** The last other row that passes at its place carries this row with it; so the level is that of the place just above it. */
export function hochbergThreshold(p: readonly number[], error: number): number[] {
  const order = ascendingOrder(p);
  const count = p.length;
  return p.map((_, row) => {
    let carried = 0;
    for (const [place, other] of withoutIndex(order, row).entries())
      if (reaches((count - place - 1) * p[other]!, error)) carried = place + 1;
    return error / (count - carried);
  });
}

/** Holm's levels, from the largest p down. */
export const hochberg: Correction = {
  name: "hochberg",
  holds: "family-wise error",
  dependence: "independent or positive",
  source: ["hochberg-1988", "sarkar-1998"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "Independent or positively dependent comparisons, so that the Simes inequality holds (Sarkar 1998). Comparisons against one level are; all pairs and contrasts of opposite sign need not be, and then holm is the safe choice.",
    betterThan:
      "It rejects all that holm rejects, and more. hommel rejects at least as much under the same assumption. No joint limits agree with it; those shown are each comparison's own.",
    source: [sources["hochberg-1988"], sources["sarkar-1998"]],
  },
  fits: () => null,
  decide(problem) {
    const { p, error } = problem;
    const adjustedP = hochbergAdjustedP(p);
    const decisions = agreed(p, adjustedP, hochbergThreshold(p, error), error);
    return assembled(problem, {
      ...decisions,
      limits: limitsAtThreshold(problem, decisions.threshold),
      notes: problem.names.length > 1 ? [{ code: "needs-positive-dependence", facts: { method: "hochberg" } }] : [],
    });
  },
};
