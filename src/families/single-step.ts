import { agreed, assembled, type FamilyNote, jointLimits, ownPByT } from "./answer.ts";
import type { Correction } from "./correction.ts";
import { type JointDistribution, jointDistribution, jointMisfit } from "./joint.ts";
import { sources } from "./sources.ts";
import type { CorrectionName, FamilyAnswer, FamilyProblem } from "./types.ts";

const name: CorrectionName = "single-step";

/** Own p and its threshold come from a root search on the joint tail, which is computed to about 1e-6 where it is no product. */
export const jointSlack = 1e-3;

/** What must be said about a joint distribution that is not exact. */
export function jointNotes({ exact }: JointDistribution): readonly FamilyNote[] {
  return exact ? [] : [{ code: "joint-normal-scores", facts: {} }];
}

/** Decides a family at the one critical value of its largest statistic. */
export function decideSingleStep(problem: FamilyProblem): FamilyAnswer {
  const joint = jointDistribution(problem);
  const { scores } = joint;
  const rows = scores.map((_, i) => i);
  const tails = scores.map((score) => joint.upperTail(rows, score));
  const score = joint.critical(rows, problem.error);
  const level = joint.ownP(score);
  const p = ownPByT(problem);
  const decisions = agreed(
    p,
    tails.map((tail, i) => Math.max(tail.p, p[i]!)),
    rows.map(() => level),
    problem.error,
    jointSlack,
  );
  return assembled(problem, {
    p,
    ...decisions,
    limits: jointLimits(
      problem,
      rows.map((row) => joint.statisticAt(row, score)),
    ),
    monteCarloError: Math.max(...tails.map((tail) => tail.error)),
    notes: jointNotes(joint),
  });
}

/** Every comparison at the critical value of the largest statistic of the family, by the joint t distribution. */
export const singleStep: Correction = {
  name,
  holds: "family-wise error",
  dependence: "joint distribution",
  source: ["somerville-1998", "conneely-boehnke-2007"],
  passing: null,
  help: {
    controls: "The chance of at least one false rejection in the family.",
    assumes:
      "Normal errors and known correlations of the comparisons. Exact with one pooled error term; where each comparison has its own (unequal variances, within subjects, multilevel) the own p are right and their joint distribution is approximated by that of normal scores (Conneely & Boehnke 2007); in small studies that can exceed the stated error a little: 5.6% for all pairs within 12 subjects, simulated. holm does not lean on it.",
    betterThan:
      "The strongest method with joint intervals of both sides for any list of comparisons: above bonferroni and sidak always, above scheffe for any list, equal to tukey for all pairs of equal groups and to dunnett against one. step-down rejects more, without such intervals.",
    source: [sources["somerville-1998"], sources["conneely-boehnke-2007"]],
  },
  fits: (problem) => jointMisfit(name, problem),
  decide: decideSingleStep,
};
