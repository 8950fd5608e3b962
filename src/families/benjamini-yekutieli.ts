import { decideFalseDiscovery } from "./benjamini-hochberg.ts";
import type { Correction } from "./correction.ts";
import { sources } from "./sources.ts";

/** 1 + 1/2 + ... + 1/count, the price of any dependence. */
export function harmonicSum(count: number): number {
  let sum = 0;
  for (let i = count; i >= 1; i--) sum += 1 / i;
  return sum;
}

/** Benjamini & Yekutieli's step-up method. */
export const by: Correction = {
  name: "by",
  holds: "false discovery rate",
  dependence: "any",
  source: ["benjamini-yekutieli-2001"],
  passing: null,
  help: {
    controls:
      "The false discovery rate: the expected share of false ones among the rejections. It does not hold the family's error.",
    assumes: "Only that each comparison's own p is right; any dependence between comparisons.",
    betterThan:
      "bh rejects more and is fit unless comparisons depend on each other negatively. With few comparisons holm, which holds the family's error, can reject more than by.",
    source: [sources["benjamini-yekutieli-2001"]],
  },
  fits: () => null,
  decide: (problem) => decideFalseDiscovery(problem, harmonicSum(problem.names.length)),
};
