import { agreed, assembled, criticalAt, limitsAtThreshold, stepLimits } from "./answer.ts";
import { claimOf } from "./claim.ts";
import type { Correction } from "./correction.ts";
import { misfit } from "./misfits.ts";
import { finalWeights, graphAdjustedP, graphThreshold, type PassingGraph } from "./passing-graph.ts";
import { sources } from "./sources.ts";
import type { CorrectionName, FamilyAnswer, FamilyProblem, Misfit } from "./types.ts";

/** Sums of declared shares may miss 1 by this much: decimals such as 0.333333333333 are meant as thirds. */
const shareSlack = 1e-9;

/** What is wrong with declared initial weights; null when nothing is. */
export function weightsMisfit(names: readonly string[], weights: readonly number[]): Misfit | null {
  if (weights.length !== names.length)
    return misfit("weights-count", { weights: weights.length, comparisons: names.length });
  const outside = weights.findIndex((weight) => !(weight >= 0 && weight <= 1 + shareSlack));
  if (outside >= 0) return misfit("weight-outside", { comparison: names[outside]!, value: weights[outside]! });
  const sum = weights.reduce((total, weight) => total + weight, 0);
  return Math.abs(sum - 1) > shareSlack ? misfit("weights-not-one", { sum: Number(sum.toPrecision(10)) }) : null;
}

/** What is wrong with declared passing shares; null when nothing is. */
export function passesMisfit(names: readonly string[], passes: readonly (readonly number[])[]): Misfit | null {
  const count = names.length;
  if (passes.length !== count || passes.some((row) => row.length !== count))
    return misfit("passes-count", { comparisons: count });
  for (const [i, row] of passes.entries()) {
    const from = names[i]!;
    if (row[i] !== 0) return misfit("pass-to-itself", { from });
    const outside = row.findIndex((share) => !(share >= 0 && share <= 1 + shareSlack));
    if (outside >= 0) return misfit("pass-outside", { from, to: names[outside]!, value: row[outside]! });
    const sum = row.reduce((total, share) => total + share, 0);
    if (sum > 1 + shareSlack) return misfit("passes-over-one", { from, sum: Number(sum.toPrecision(10)) });
  }
  return null;
}

/**
 * Decides a family by a graph of passing shares.
 * @param whole  shares at which limits are drawn once everything is rejected, summing to at most 1; fixed before the data
 */
export function decideGraph(problem: FamilyProblem, graph: PassingGraph, whole = graph.weights): FamilyAnswer {
  const { p, error } = problem;
  const decisions = agreed(p, graphAdjustedP(p, graph), graphThreshold(p, graph, error), error);
  const { rejected, threshold } = decisions;
  const levels = (shares: readonly number[]) =>
    criticalAt(
      problem,
      shares.map((share) => share * error),
    );
  const limits =
    claimOf(problem).type === "two-sided"
      ? limitsAtThreshold(problem, threshold)
      : stepLimits(problem, rejected, rejected.every(Boolean), levels(finalWeights(p, graph, error)), levels(whole));
  return assembled(problem, { ...decisions, limits });
}

const name: CorrectionName = "graph";

/** Declared shares of the error that pass on as comparisons are rejected. */
export const graph: Correction = {
  name,
  holds: "family-wise error",
  dependence: "any",
  source: ["bretz-2009", "strassburger-bretz-2008"],
  passing: (problem) => problem.graph!,
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "That weights and passing shares were fixed before the data, and each comparison's own p is right; any dependence between comparisons.",
    betterThan:
      "It says which comparison matters first, where holm treats all alike; holm, fixed sequence and fallback are special cases of it. For one-sided and margin claims the limits hold jointly; for two-sided ones no such limits are known, and those shown are each comparison's own.",
    source: [sources["bretz-2009"], sources["strassburger-bretz-2008"]],
  },
  fits({ names, graph: declared }) {
    if (declared === null) return misfit("no-weights", { method: name });
    return weightsMisfit(names, declared.weights) ?? passesMisfit(names, declared.passes);
  },
  decide: (problem) => decideGraph(problem, problem.graph!),
};
