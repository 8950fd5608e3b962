import type { DetectableResult } from "../results/index.ts";
import { effectPower } from "./closed-form.ts";
import { evaluate, type Goal, planned, powerFor, requireReachable, targetTruths } from "./evaluate.ts";
import { groupSizes } from "./layout.ts";
import { PlanningError } from "./problem.ts";
import type { PlanAim, PlanningDesign, PlanningOptions } from "./types.ts";

/**
 * By how much the expected differences must be multiplied so that this many subjects reach the target: the pattern of the expectation
 * stays, its size is solved for (to six digits where exact; where simulated, on common random numbers, to four).
 *
 * @returns `comparisons`: the differences at that multiple, in the response's unit and in units of the mean spread (root of the mean
 *   variance over cells); `effectF` for one omnibus effect: root of noncentrality over subjects (Cohen's f between subjects)
 * @throws PlanningError "too-few-subjects", "power-not-above-error", "no-difference-expected", "design-not-planned" (margins: there a
 *   larger difference is not stronger evidence)
 */
export async function detectableFor(
  question: {
    readonly design: PlanningDesign;
    readonly aim: PlanAim;
    readonly subjects: number;
    readonly target: number;
    readonly goal: Goal;
  },
  options: PlanningOptions,
): Promise<DetectableResult> {
  const { design, aim, subjects, target, goal } = question;
  if ("family" in aim && aim.family.margin !== null) {
    throw new PlanningError(
      "design-not-planned",
      "With a margin a larger difference is not stronger evidence: there is no smallest detectable one.",
      "Plan its size or power instead.",
      aim.family.name,
    );
  }
  const it = planned(design, aim);
  requireReachable(it, goal, target);
  const sizes = groupSizes(design.allocation, subjects);
  const at = (multiple: number) => evaluate(it, { sizes, multiple, goal }, options);
  let low = 0;
  let high = 1;
  let values = await at(high);
  while (powerFor(values, goal) < target) {
    low = high;
    high *= 2;
    if (high > 1e9) {
      throw new PlanningError(
        "too-few-subjects",
        `With ${subjects} subjects no difference reaches ${target * 100}% power.`,
        "Ask for more subjects.",
      );
    }
    values = await at(high);
  }
  const close = values.method === "simulation" ? 1e-4 : 1e-9;
  while (high - low > close * high) {
    const middle = (low + high) / 2;
    const there = await at(middle);
    if (powerFor(there, goal) >= target) {
      high = middle;
      values = there;
    } else low = middle;
  }
  const variances = it.layout.covariances.flatMap((one) => one.map((row, i) => row[i]!));
  const spread = Math.sqrt(variances.reduce((sum, value) => sum + value, 0) / variances.length);
  const means = it.layout.means.map((mean) => mean * high);
  const plainLayout = {
    ...it.layout,
    shape: "normal" as const,
    residuals: null,
    missing: 0,
    sameCovariance: true,
    errors: "pooled" as const,
  };
  const noncentrality =
    it.effects.length === 1
      ? effectPower(plainLayout, it.effects[0]!, sizes, means, it.errorRate)!.noncentrality
      : null;
  return {
    kind: "detectable",
    of: it.of,
    target,
    goal,
    method: values.method,
    errorRate: it.errorRate,
    correction: it.correction,
    subjects,
    subjectsPerGroup: sizes,
    multiple: high,
    ...("family" in aim
      ? {
          comparisons: targetTruths(it, high).map((estimate, i) => ({
            comparison: aim.family.contrasts[i]!.name,
            estimate,
            standardised: estimate / spread,
          })),
        }
      : {}),
    ...(noncentrality === null ? {} : { effectF: Math.sqrt(noncentrality / subjects) }),
    notes: it.notes,
  };
}
