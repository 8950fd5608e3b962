import type { Correction } from "./correction.ts";
import { decideGraph, weightsMisfit } from "./graph.ts";
import { chainGraph } from "./passing-graph.ts";
import { sources } from "./sources.ts";
import type { FamilyProblem } from "./types.ts";

/** Declared shares, or equal ones in member order. */
export function fallbackWeights({ names, graph }: FamilyProblem): readonly number[] {
  return graph?.weights ?? names.map(() => 1 / names.length);
}

/** In order, each comparison with its own share and what the one before it passes on. */
export const fallback: Correction = {
  name: "fallback",
  holds: "family-wise error",
  dependence: "any",
  source: ["wiens-2003", "bretz-2009", "strassburger-bretz-2008"],
  passing: (problem) => chainGraph(fallbackWeights(problem)),
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "That order and weights were fixed before the data, and each comparison's own p is right; any dependence between comparisons.",
    betterThan:
      "Like fixed sequence it favours the early comparisons, but a comparison that fails does not close the rest. fixed sequence is stronger when the order is right; holm when there is no order.",
    source: [sources["wiens-2003"], sources["bretz-2009"], sources["strassburger-bretz-2008"]],
  },
  fits: (problem) => weightsMisfit(problem.names, fallbackWeights(problem)),
  decide: (problem) => decideGraph(problem, chainGraph(fallbackWeights(problem))),
};
