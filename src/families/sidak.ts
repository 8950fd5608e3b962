import { agreed, assembled, criticalAt, jointLimits } from "./answer.ts";
import type { Correction } from "./correction.ts";
import { misfit } from "./misfits.ts";
import { sources } from "./sources.ts";

/** Each comparison at the level that independent comparisons would need. */
export const sidak: Correction = {
  name: "sidak",
  holds: "family-wise error",
  dependence: "independent or positive",
  source: ["sidak-1967"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "Two-sided comparisons of estimates that are jointly normal or t, under any correlation (Sidak 1967); or independent comparisons. One-sided and equivalence claims are not covered.",
    betterThan:
      "A little above bonferroni (level 0.0085 against 0.0083 for six at 5%). single-step uses the correlations and is stronger; step-down and holm are stronger still where stepwise decisions will do.",
    source: [sources["sidak-1967"]],
  },
  fits({ sides, margin }) {
    if (margin?.type === "equivalence") return misfit("no-margin", { method: "sidak" });
    // Sidak's inequality is about symmetric boxes; one-sided it fails for negative correlations.
    return margin !== null || sides !== "two-sided" ? misfit("two-sided-only", { method: "sidak" }) : null;
  },
  decide(problem) {
    const { p, error } = problem;
    // expm1 and log1p keep the digits of small p, where 1 - (1 - p)^m would lose them.
    const adjustedP = p.map((value) => (value === 1 ? 1 : -Math.expm1(p.length * Math.log1p(-value))));
    const level = -Math.expm1(Math.log1p(-error) / p.length);
    const decisions = agreed(
      p,
      adjustedP,
      p.map(() => level),
      error,
    );
    return assembled(problem, {
      ...decisions,
      limits: jointLimits(problem, criticalAt(problem, decisions.threshold)),
    });
  },
};
