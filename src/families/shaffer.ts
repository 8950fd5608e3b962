import { agreed, assembled, limitsAtThreshold, reaches } from "./answer.ts";
import type { Correction } from "./correction.ts";
import { mostTrue, mostTrueSets, possibleTrueSets, type TrueSet } from "./logical-relations.ts";
import { misfit } from "./misfits.ts";
import { ascendingOrder, withoutIndex } from "./ordering.ts";
import { sources } from "./sources.ts";
import type { CorrectionName } from "./types.ts";

const name: CorrectionName = "shaffer";
type TrueSets = readonly TrueSet[];

/**
 * For an order of rows: how many null hypotheses can still be true before each step, those before it being false. The last entry is what is left
 * when all of the order are false.
 */
function stillTrue(sets: TrueSets, order: readonly number[], words: number): number[] {
  const gone = new Uint32Array(words);
  return [...order, -1].map((row) => {
    const most = mostTrue(sets, gone);
    if (row >= 0) gone[row >> 5]! |= 1 << (row & 31);
    return most;
  });
}

/**
 * Shaffer's second procedure (S2): Holm's steps, but at each step p is multiplied by the number of null hypotheses that can be true
 * together, given which ones have been rejected.
 * @source shaffer-1986
 */
export function shafferAdjustedP(p: readonly number[], sets: TrueSets): number[] {
  const order = ascendingOrder(p);
  const most = stillTrue(sets, order, Math.ceil(p.length / 32));
  const adjustedP = new Array<number>(p.length);
  let largest = 0;
  for (const [step, row] of order.entries()) {
    largest = Math.max(largest, Math.min(1, most[step]! * p[row]!));
    adjustedP[row] = largest;
  }
  return adjustedP;
}

/** The level left for a row when the others have been rejected as far as they go while it stands. */
export function shafferThreshold(p: readonly number[], sets: TrueSets, error: number): number[] {
  const order = ascendingOrder(p);
  return p.map((_, row) => {
    const others = withoutIndex(order, row);
    const most = stillTrue(sets, others, Math.ceil(p.length / 32));
    let step = 0;
    while (step < others.length && reaches(most[step]! * p[others[step]!]!, error)) step++;
    return error / most[step]!;
  });
}

/** Holm's steps with the exact logical relations of the comparisons. */
export const shaffer: Correction = {
  name,
  holds: "family-wise error",
  dependence: "any",
  source: ["shaffer-1986"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "Two-sided comparisons of no difference, with their contrast weights; any dependence between them. The relations (if a equals b and b equals c, then a equals c) are enumerated exactly.",
    betterThan:
      "It rejects all that holm rejects, and more where comparisons are related, as all pairs are: after the first rejection among all pairs of four means at most three null hypotheses can be true, not five. step-down uses correlations but not relations; either can be the stronger. No joint limits agree with it; those shown are each comparison's own.",
    source: [sources["shaffer-1986"]],
  },
  fits(problem) {
    if (problem.margin?.type === "equivalence") return misfit("no-margin", { method: name });
    if (problem.margin !== null || problem.sides !== "two-sided") return misfit("two-sided-only", { method: name });
    if (problem.weights.length !== problem.names.length) return misfit("no-contrast-weights", { method: name });
    return possibleTrueSets(problem.weights, problem.watch) === null
      ? misfit("too-many-relations", { method: name, comparisons: problem.names.length, most: mostTrueSets })
      : null;
  },
  decide(problem) {
    const { p, error } = problem;
    const sets = possibleTrueSets(problem.weights, problem.watch)!;
    const decisions = agreed(p, shafferAdjustedP(p, sets), shafferThreshold(p, sets, error), error);
    return assembled(problem, {
      ...decisions,
      limits: limitsAtThreshold(problem, decisions.threshold),
      notes: [{ code: "logical-relations", facts: { sets: sets.length } }],
    });
  },
};
