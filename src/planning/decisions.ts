import {
  comparisonP,
  type CorrectionName,
  type Decider,
  familyDecider,
  type FamilyProblem,
  gatekeep,
  misfitOf,
  FamilyProblemError,
} from "../families/index.ts";
import type { Watch } from "../host/index.ts";
import { tTwoSidedTail, tUpperQuantile, tUpperTail } from "../numeric/index.ts";
import type { ContrastErrors, Evidence } from "./contrast-errors.ts";
import type { PlanLayout } from "./layout.ts";
import { PlanningError } from "./problem.ts";
import type { FamilyPlan } from "./types.ts";

/** The family and those it waits for, the first one first. */
export function familyChain(plan: FamilyPlan): FamilyPlan[] {
  return plan.after === null ? [plan] : [...familyChain(plan.after.family), plan];
}

/** Methods whose intervals hold jointly and agree with the decisions: coverage is the decision on what deviates from the truth. */
const withJointIntervals: ReadonlySet<CorrectionName> = new Set([
  "none",
  "bonferroni",
  "sidak",
  "tukey",
  "games-howell",
  "dunnett",
  "scheffe",
  "single-step",
]);
export const hasJointIntervals = (plan: FamilyPlan): boolean =>
  plan.margin === null && withJointIntervals.has(plan.correction);

/** The method that stands for the declared one in simulation: resampling would rearrange every study thousands of times. */
export const simulatedCorrection = (name: CorrectionName): CorrectionName =>
  name === "resampling" ? "step-down" : name;
const needsCorrelation = (name: CorrectionName) => ["single-step", "step-down"].includes(simulatedCorrection(name));

/** The family problem of a plan, without evidence. */
export function templateOf(
  plan: FamilyPlan,
  layout: PlanLayout,
  facts: {
    readonly correlation: FamilyProblem["correlation"];
    readonly commonDf: number | null;
    readonly watch: Watch;
  },
): FamilyProblem {
  const blank = plan.contrasts.map(() => 0);
  return {
    names: plan.contrasts.map((contrast) => contrast.name),
    estimates: blank,
    standardErrors: blank.map(() => 1),
    df: blank.map(() => facts.commonDf ?? Number.POSITIVE_INFINITY),
    p: blank.map(() => 1),
    correlation: facts.correlation,
    commonDf: facts.commonDf,
    sides: plan.sides,
    margin: plan.margin,
    error: plan.error,
    shape: {
      kind: plan.shape.kind,
      means: plan.shape.means,
      repeated: plan.shape.repeated,
      within: layout.withinCells > 1 && facts.commonDf === null,
    },
    weights: plan.meansWeights,
    graph: plan.graph,
    resamples: null,
    seed: 1,
    watch: facts.watch,
  };
}

/** Refuses methods that planning has no account of, and families that their method does not fit. */
export function requireFitting(plan: FamilyPlan, template: FamilyProblem): void {
  if (["dunn", "conover", "nemenyi"].includes(plan.correction)) {
    throw new PlanningError(
      "design-not-planned",
      `Planning covers comparisons of means; ${plan.correction} compares mean ranks.`,
      "Plan with a method for means, such as holm.",
      plan.name,
    );
  }
  const unfit = misfitOf(simulatedCorrection(plan.correction), template);
  if (unfit !== null) throw new FamilyProblemError(unfit);
}

/** Own p of every comparison from its statistic's parts. Same numbers as `comparisonP`, without its checks where it is plain. */
function ownP(plan: FamilyPlan, estimate: number, standardError: number, df: number): number {
  if (plan.margin !== null) return comparisonP({ estimate, standardError, df, sides: plan.sides, margin: plan.margin });
  const t = estimate / standardError;
  if (plan.sides === "two-sided") return tTwoSidedTail(t, df);
  return tUpperTail(plan.sides === "upper" ? t : -t, df);
}

/** One family of a chain, placed among all comparisons that are simulated together. */
export interface PlacedFamily {
  readonly plan: FamilyPlan;
  readonly layout: PlanLayout;
  readonly errors: ContrastErrors;
  readonly evidence: Evidence;
}

/**
 * Decides the last family of a chain from the evidence of one study.
 * @param truths  true value of each comparison, family by family; what is decided is deviation + truth
 */
export type ChainDecider = (truths: readonly (readonly number[])[]) => readonly boolean[];

/** Methods that reject everything once every own p is at most error / comparisons (Bonferroni's bound). */
const sharperThanBonferroni: ReadonlySet<CorrectionName> = new Set([
  "bonferroni",
  "sidak",
  "holm",
  "hochberg",
  "hommel",
  "shaffer",
  "single-step",
  "step-down",
]);

/**
 * What the statistics already settle without their p: nothing is rejected where no own p reaches the error (no method is sharper
 * than none), everything where all are within Bonferroni's bound; Holm's steps and Bonferroni's in full. Null where p are needed.
 * The critical values are kept by df.
 */
function statisticDecider(plan: FamilyPlan) {
  const count = plan.contrasts.length;
  const correction = simulatedCorrection(plan.correction);
  const nothing: readonly boolean[] = new Array<boolean>(count).fill(false);
  const everything: readonly boolean[] = new Array<boolean>(count).fill(true);
  const sided = plan.sides === "two-sided" ? 2 : 1;
  const byDf = new Map<number, Float64Array>();
  const statistics = new Float64Array(count);
  let lastDf = Number.NaN;
  let critical: Float64Array = new Float64Array(0);
  return (evidence: Evidence, truths: readonly number[]): readonly boolean[] | null => {
    if (plan.margin !== null) return null;
    const df = evidence.df[0]!;
    let most = Number.NEGATIVE_INFINITY;
    let least = Number.POSITIVE_INFINITY;
    for (let i = 0; i < count; i++) {
      if (evidence.df[i] !== df) return null;
      const t = (evidence.deviations[i]! + truths[i]!) / evidence.standardErrors[i]!;
      const strength = sided === 2 ? Math.abs(t) : plan.sides === "upper" ? t : -t;
      statistics[i] = strength;
      if (strength > most) most = strength;
      if (strength < least) least = strength;
    }
    if (df !== lastDf) {
      let found = byDf.get(df);
      if (found === undefined) {
        // Own df that change from study to study are not worth keeping.
        if (byDf.size >= 64) return null;
        // Entry m: the statistic whose own p is error / (m + 1).
        found = Float64Array.from({ length: count }, (_, m) => tUpperQuantile(plan.error / (m + 1) / sided, df));
        byDf.set(df, found);
      }
      critical = found;
      lastDf = df;
    }
    if (!(most >= critical[0]!)) return nothing;
    if (correction === "bonferroni") return Array.from(statistics, (value) => value >= critical[count - 1]!);
    if (correction === "none") return Array.from(statistics, (value) => value >= critical[0]!);
    if (least >= critical[count - 1]! && sharperThanBonferroni.has(correction)) return everything;
    if (correction !== "holm") return null;
    const rejected = new Array<boolean>(count).fill(false);
    for (let left = count; left > 0; left--) {
      let next = -1;
      for (let i = 0; i < count; i++) if (!rejected[i] && (next < 0 || statistics[i]! > statistics[next]!)) next = i;
      if (!(statistics[next]! >= critical[left - 1]!)) break;
      rejected[next] = true;
    }
    return rejected;
  };
}

/** Compiles a chain. Deciders are kept by df where the joint law depends on it. */
export function chainDecider(
  chain: readonly PlacedFamily[],
  watch: Watch,
): { decide: ChainDecider; newStudy: (df: number) => void } {
  const deciders = chain.map(() => new Map<number, { template: FamilyProblem; decide: Decider }>());
  let studyDf = 0;
  const correlations: (number[][] | null)[] = chain.map(() => null);
  const compiled = (index: number) => {
    const { plan, layout, errors } = chain[index]!;
    const key = errors.shared ? studyDf : -1;
    let found = deciders[index]!.get(key);
    if (found === undefined) {
      const template = templateOf(plan, layout, {
        correlation: errors.correlation(),
        commonDf: errors.shared ? errors.commonDf(studyDf) : null,
        watch,
      });
      found = { template, decide: familyDecider(simulatedCorrection(plan.correction), template) };
      deciders[index]!.set(key, found);
    }
    return found;
  };
  const passesOn = chain.some(({ plan }) => plan.after?.any === true);
  const pOf = (index: number, truths: readonly number[]) => {
    const { plan, evidence } = chain[index]!;
    return truths.map((truth, i) =>
      ownP(plan, evidence.deviations[i]! + truth, evidence.standardErrors[i]!, evidence.df[i]!),
    );
  };
  const shortcuts = chain.map(({ plan }) => statisticDecider(plan));
  const decideOne = (index: number, truths: readonly number[]): readonly boolean[] => {
    const { plan, errors, evidence } = chain[index]!;
    const soon = shortcuts[index]!(evidence, truths);
    if (soon !== null) return soon;
    const p = pOf(index, truths);
    const { decide } = compiled(index);
    if (errors.shared) return decide({ p });
    if (!needsCorrelation(plan.correction)) return decide({ p, df: Array.from(evidence.df) });
    correlations[index] ??= errors.correlation();
    return decide({ p, df: Array.from(evidence.df), correlation: correlations[index]! });
  };
  const decideAny: ChainDecider = (truths) => {
    const families = chain.map(({ plan, evidence }, index) => ({
      name: plan.name,
      correction: simulatedCorrection(plan.correction),
      after: plan.after === null ? null : { family: plan.after.family.name, any: plan.after.any },
      problem: {
        ...compiled(index).template,
        estimates: truths[index]!.map((truth, i) => truth + evidence.deviations[i]!),
        standardErrors: Array.from(evidence.standardErrors),
        df: Array.from(evidence.df),
        p: pOf(index, truths[index]!),
      },
    }));
    return gatekeep(families).at(-1)!.answer.rejected;
  };
  return {
    newStudy(df) {
      studyDf = df;
      correlations.fill(null);
    },
    decide(truths) {
      if (passesOn) return decideAny(truths);
      for (let index = 0; index < chain.length - 1; index++)
        if (!decideOne(index, truths[index]!).every(Boolean)) return truths.at(-1)!.map(() => false);
      return decideOne(chain.length - 1, truths.at(-1)!);
    },
  };
}

/** Whether each comparison's null hypothesis is true at these true values. */
export function trueNulls(plan: FamilyPlan, truths: readonly number[], scale: number): boolean[] {
  const near = 1e-10 * scale;
  return truths.map((truth) => {
    const { margin } = plan;
    if (margin?.type === "equivalence") return Math.abs(truth) >= margin.value - near;
    if (margin !== null)
      return margin.better === "lower" ? truth >= margin.value - near : truth <= -margin.value + near;
    if (plan.sides === "upper") return truth <= near;
    if (plan.sides === "lower") return truth >= -near;
    return Math.abs(truth) <= near;
  });
}
