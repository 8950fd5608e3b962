import { agreed, assembled, criticalAt, jointLimits } from "./answer.ts";
import type { Correction } from "./correction.ts";
import { unpassedGraph } from "./passing-graph.ts";
import { sources } from "./sources.ts";

/** Each comparison at the error divided by the number of comparisons. */
export const bonferroni: Correction = {
  name: "bonferroni",
  holds: "family-wise error",
  dependence: "any",
  source: ["dunn-1961"],
  passing: ({ names }) => unpassedGraph(names.length),
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes: "Only that each comparison's own p is right; any dependence between comparisons.",
    betterThan:
      "holm rejects everything that bonferroni rejects and more. bonferroni remains for its simple joint intervals of both sides, which agree with every decision, and as the first of two families when the second comes `after any of` it.",
    source: [sources["dunn-1961"]],
  },
  fits: () => null,
  decide(problem) {
    const { p, error } = problem;
    const adjustedP = p.map((value) => Math.min(1, value * p.length));
    const decisions = agreed(
      p,
      adjustedP,
      p.map(() => error / p.length),
      error,
    );
    return assembled(problem, {
      ...decisions,
      limits: jointLimits(problem, criticalAt(problem, decisions.threshold)),
    });
  },
};
