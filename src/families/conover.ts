import type { Correction } from "./correction.ts";
import { holm } from "./holm.ts";
import { misfit } from "./misfits.ts";
import { sources } from "./sources.ts";

/** Conover & Iman's t comparisons of mean ranks, the family's error held by Holm's steps. */
export const conover: Correction = {
  ...holm,
  name: "conover",
  source: ["conover-iman-1979", "holm-1979"],
  passing: null,
  help: {
    controls:
      "The chance of at least one false rejection in the family. The paper compares without correction once the omnibus is significant, which does not hold that error beyond three groups; so Holm's steps are added here.",
    assumes: "Values that can be ranked together; under the null hypothesis all groups share one distribution.",
    betterThan:
      "It rejects more than dunn, as its standard errors are those of the ranks within groups, and it goes in steps.",
    source: [sources["conover-iman-1979"], sources["holm-1979"]],
  },
  fits: ({ ranks }) => (ranks === true ? null : misfit("needs-ranks", { method: "conover" })),
};
