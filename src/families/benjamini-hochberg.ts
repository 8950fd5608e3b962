import { agreed, assembled, limitsAtThreshold, reaches } from "./answer.ts";
import type { Correction } from "./correction.ts";
import { ascendingOrder, withoutIndex } from "./ordering.ts";
import { sources } from "./sources.ts";
import type { FamilyAnswer, FamilyProblem } from "./types.ts";

/**
 * False discovery adjusted p: from the largest p down, m * penalty / rank times each, never above a later one.
 * @param penalty  1 for Benjamini-Hochberg, the harmonic sum for Benjamini-Yekutieli
 */
export function falseDiscoveryAdjustedP(p: readonly number[], penalty: number): number[] {
  const adjustedP = new Array<number>(p.length);
  let smallest = 1;
  for (const [step, row] of ascendingOrder(p).reverse().entries()) {
    smallest = Math.min(smallest, (p.length * penalty * p[row]!) / (p.length - step));
    adjustedP[row] = smallest;
  }
  return adjustedP;
}

/** The last other row that passes with one more below it carries this row up to the level of that place. */
export function falseDiscoveryThreshold(p: readonly number[], penalty: number, error: number): number[] {
  const order = ascendingOrder(p);
  const unit = error / (p.length * penalty);
  return p.map((_, row) => {
    let carried = 0;
    for (const [place, other] of withoutIndex(order, row).entries())
      if (reaches((p.length * penalty * p[other]!) / (place + 2), error)) carried = place + 1;
    return unit * (carried + 1);
  });
}

/** Decides a family whose false discovery rate is held. */
export function decideFalseDiscovery(problem: FamilyProblem, penalty: number): FamilyAnswer {
  const { p, error } = problem;
  const adjustedP = falseDiscoveryAdjustedP(p, penalty);
  const decisions = agreed(p, adjustedP, falseDiscoveryThreshold(p, penalty, error), error);
  return assembled(problem, {
    ...decisions,
    limits: limitsAtThreshold(problem, decisions.threshold),
    notes: [{ code: "false-discovery-not-family-error", facts: {} }],
  });
}

/** Benjamini & Hochberg's step-up method. */
export const bh: Correction = {
  name: "bh",
  holds: "false discovery rate",
  dependence: "independent or positive",
  source: ["benjamini-hochberg-1995", "benjamini-yekutieli-2001", "benjamini-yekutieli-2005"],
  passing: null,
  help: {
    controls:
      "The false discovery rate: the expected share of false ones among the rejections. It does not hold the family's error; with one true null hypothesis among many false ones, a false rejection is likely.",
    assumes: "Independent or positively dependent comparisons (Benjamini & Yekutieli 2001).",
    betterThan:
      "With many comparisons it rejects more than any method that holds the family's error, because it promises less. Fit for screening, where a follow-up study catches the false ones. The limits of the rejected rows are those of Benjamini & Yekutieli (2005): of the rejected rows at most the stated share is expected to be missed.",
    source: [
      sources["benjamini-hochberg-1995"],
      sources["benjamini-yekutieli-2001"],
      sources["benjamini-yekutieli-2005"],
    ],
  },
  fits: () => null,
  decide: (problem) => decideFalseDiscovery(problem, 1),
};
