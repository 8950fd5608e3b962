import type { Correction } from "./correction.ts";
import { jointMisfit } from "./joint.ts";
import { againstOneMisfit, commonErrorMisfit } from "./members.ts";
import { decideSingleStep } from "./single-step.ts";
import { sources } from "./sources.ts";
import type { CorrectionName } from "./types.ts";

const name: CorrectionName = "dunnett";

/** Each level against one, by their joint t distribution; one- or two-sided, any group sizes. */
export const dunnett: Correction = {
  name,
  holds: "family-wise error",
  dependence: "joint distribution",
  source: ["dunnett-1955"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection among the comparisons of each level with the one.",
    assumes:
      "Each level against one and the same, one pooled error term (equal variances; within subjects: sphericity), normal errors. Any group sizes, one-sided or two-sided.",
    betterThan:
      "Above bonferroni, holm's first step and tukey for these members, with joint intervals. step-down rejects more, with joint intervals only for one-sided claims. single-step is the same here and also takes other members and unequal variances.",
    source: [sources["dunnett-1955"]],
  },
  fits: (problem) => againstOneMisfit(name, problem) ?? commonErrorMisfit(name, problem) ?? jointMisfit(name, problem),
  decide: decideSingleStep,
};
