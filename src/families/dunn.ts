import { bonferroni } from "./bonferroni.ts";
import type { Correction } from "./correction.ts";
import { misfit } from "./misfits.ts";
import { sources } from "./sources.ts";

/** Dunn's comparisons of mean ranks: normal statistics, Bonferroni's levels. */
export const dunn: Correction = {
  ...bonferroni,
  name: "dunn",
  source: ["dunn-1964"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "Independent groups whose values can be ranked together; under the null hypothesis all groups share one distribution. Large groups, as the statistics are referred to the normal distribution.",
    betterThan:
      "Any members may be compared. conover uses the spread of the ranks within groups and holm's steps and rejects more; holm on the same statistics also does.",
    source: [sources["dunn-1964"]],
  },
  fits: ({ ranks }) => (ranks === true ? null : misfit("needs-ranks", { method: "dunn" })),
};
