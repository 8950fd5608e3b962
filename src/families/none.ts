import { agreed, assembled, limitsAtThreshold } from "./answer.ts";
import type { Correction } from "./correction.ts";

/** Each comparison on its own: nothing is held over the family. */
export const none: Correction = {
  name: "none",
  holds: "nothing",
  dependence: "not needed",
  source: [],
  passing: null,
  help: {
    controls:
      "The error of each comparison alone. Over the family nothing is held: six true null hypotheses, tested independently at 5%, give at least one false alarm in 26.5% of studies (common practice).",
    assumes: "What each comparison's own test assumes.",
    betterThan:
      "It rejects at least as much as every other method, because it answers a weaker question. Fit for one comparison decided on before the data, or for a description that claims nothing.",
    source: [],
  },
  fits: () => null,
  decide(problem) {
    const adjustedP = [...problem.p];
    const decisions = agreed(
      problem.p,
      adjustedP,
      problem.p.map(() => problem.error),
      problem.error,
    );
    const { notes, ...limits } = limitsAtThreshold(problem, decisions.threshold);
    // At the full error the limits are plainly the individual ones; there is nothing more to say about them.
    const kept = notes.filter((note) => note.code !== "limits-at-threshold");
    return assembled(problem, { ...decisions, limits: { ...limits, notes: kept } });
  },
};
