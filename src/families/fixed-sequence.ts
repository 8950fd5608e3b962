import type { Correction } from "./correction.ts";
import { decideGraph } from "./graph.ts";
import { chainGraph } from "./passing-graph.ts";
import { sources } from "./sources.ts";

/** Everything starts with the first. */
const orderGraph = (count: number) => chainGraph(Array.from({ length: count }, (_, i) => (i === 0 ? 1 : 0)));

/** In order, each at the full error, until one is not rejected. */
export const fixedSequence: Correction = {
  name: "fixed sequence",
  holds: "family-wise error",
  dependence: "any",
  source: ["maurer-1995", "bretz-2009", "strassburger-bretz-2008"],
  passing: ({ names }) => orderGraph(names.length),
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "That the order was fixed before the data, and each comparison's own p is right; any dependence between comparisons.",
    betterThan:
      "Stronger than any other method where the order is right, as each comparison has the full error; after the first that is not rejected nothing can be. fallback keeps something for the later ones.",
    source: [sources["maurer-1995"], sources["bretz-2009"], sources["strassburger-bretz-2008"]],
  },
  fits: () => null,
  decide: (problem) => {
    const { names } = problem;
    // Once all are rejected any shares fixed in advance may bound the estimates; equal ones bound every comparison, not only the first.
    return decideGraph(
      problem,
      orderGraph(names.length),
      names.map(() => 1 / names.length),
    );
  },
};
