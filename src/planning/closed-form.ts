import { familyDecider, jointLevel } from "../families/index.ts";
import { silentWatch } from "../host/index.ts";
import {
  fUpperQuantile,
  multivariateTProbability,
  noncentralFUpperTail,
  noncentralTLowerTail,
  noncentralTUpperTail,
  tUpperQuantile,
} from "../numeric/index.ts";
import { contrastErrors } from "./contrast-errors.ts";
import { requireFitting, templateOf } from "./decisions.ts";
import { type PlanLayout, placedWeights } from "./layout.ts";
import { effectSquares, meanCovariance, type PlannedEffect, projected } from "./omnibus-tests.ts";
import type { FamilyPlan } from "./types.ts";

/** Methods that reject each comparison by its own p against one level. */
const oneLevel = ["none", "bonferroni", "sidak", "tukey", "scheffe", "dunnett", "single-step"];

export interface FamilyPower {
  readonly each: readonly number[];
  /** Null where only simulation tells. */
  readonly every: number | null;
  readonly any: number | null;
}

/** Beyond this many comparisons the 2^k orthants of "every" are left to simulation. */
const mostOrthants = 4;

/** The same for all sizes of a family: what makes its power exactly known, or null. */
export function closedFamily(layout: PlanLayout, plan: FamilyPlan) {
  const plain =
    plan.after === null &&
    plan.margin?.type !== "equivalence" &&
    layout.shape === "normal" &&
    layout.residuals === null &&
    layout.missing === 0 &&
    layout.sameCovariance &&
    layout.errors !== "separate" &&
    (oneLevel.includes(plan.correction) || (plan.contrasts.length === 1 && plan.graph === null));
  if (!plain) return null;
  const weights = plan.contrasts.map((contrast) => placedWeights(layout, contrast.weights));
  const errors = contrastErrors(layout, weights);
  if (!errors.exact.every(Boolean)) return null;
  if (layout.errors === "spherical" && !isSpherical(layout)) return null;
  const jointly = ["tukey", "scheffe", "dunnett", "single-step"].includes(plan.correction);
  if (jointly && plan.contrasts.length > 1 && !errors.shared) return null;
  return { weights, errors };
}

/** Compound symmetry: one variance and one covariance. */
function isSpherical(layout: PlanLayout): boolean {
  const one = layout.covariances[0]!;
  const near = 1e-10 * one[0]![0]!;
  const covariance = one[1]?.[0] ?? 0;
  return one.every((row, i) => row.every((value, j) => Math.abs(value - (i === j ? one[0]![0]! : covariance)) <= near));
}

/**
 * Power of a family's comparisons by noncentral t, and of `any` and `every` by the joint noncentral multivariate t where all share one
 * error term.
 *
 * @param truths  true value of each comparison
 * @param joint  whether `any` and `every` are wanted
 * @source noncentral t: common practice; joint: Kshirsagar 1961, Genz & Bretz 2009
 */
export function familyPower(
  layout: PlanLayout,
  plan: FamilyPlan,
  sizes: readonly number[],
  truths: readonly number[],
  joint: boolean,
): FamilyPower | null {
  const closed = closedFamily(layout, plan);
  if (closed === null) return null;
  const { weights, errors } = closed;
  const df = sizes.reduce((sum, size) => sum + size - 1, 0);
  const { groups, withinCells: width } = layout;
  const covariance = (left: readonly number[], right: readonly number[]) => {
    let sum = 0;
    for (let g = 0; g < groups; g++)
      for (let i = 0; i < width; i++)
        for (let j = 0; j < width; j++)
          sum += (left[g * width + i]! * layout.covariances[0]![i]![j]! * right[g * width + j]!) / sizes[g]!;
    return sum;
  };
  const deviations = weights.map((row) => Math.sqrt(covariance(row, row)));
  const correlation = weights.map((left, i) =>
    weights.map((right, j) => (i === j ? 1 : covariance(left, right) / (deviations[i]! * deviations[j]!))),
  );
  const commonDf = errors.shared ? errors.commonDf(df) : null;
  const template = templateOf(plan, layout, { correlation, commonDf, watch: silentWatch });
  requireFitting(plan, template);
  const level = levelOf(plan, template);
  const ownDf = ownDfs(layout, plan, df);
  const { sides, shift } = claimOf(plan);
  const shifts = truths.map((truth, i) => (truth + shift) / deviations[i]!);
  const critical = ownDf.map((own) => tUpperQuantile(sides === "two-sided" ? level / 2 : level, own));
  const each = shifts.map((value, i) => {
    const c = critical[i]!;
    const own = ownDf[i]!;
    const upper = sides === "lower" ? 0 : noncentralTUpperTail(c, own, value);
    const lower = sides === "upper" ? 0 : noncentralTLowerTail(-c, own, value);
    return upper + lower;
  });
  if (weights.length === 1) return { each, every: each[0]!, any: each[0]! };
  if (!joint || commonDf === null) return { each, every: null, any: null };
  const box = (lower: readonly number[], upper: readonly number[]) =>
    multivariateTProbability({ lower, upper, correlation, df: commonDf, means: shifts }).probability;
  const infinite = critical.map(() => Number.POSITIVE_INFINITY);
  const inside = box(
    critical.map((c) => (sides === "upper" ? Number.NEGATIVE_INFINITY : -c)),
    critical.map((c) => (sides === "lower" ? Number.POSITIVE_INFINITY : c)),
  );
  let every: number | null = null;
  if (sides === "upper") every = box(critical, infinite);
  else if (sides === "lower")
    every = box(
      infinite.map((v) => -v),
      critical.map((c) => -c),
    );
  else if (weights.length <= mostOrthants) {
    every = 0;
    for (let pattern = 0; pattern < 2 ** weights.length; pattern++) {
      const up = (i: number) => ((pattern >> i) & 1) === 0;
      every += box(
        critical.map((c, i) => (up(i) ? c : Number.NEGATIVE_INFINITY)),
        critical.map((c, i) => (up(i) ? Number.POSITIVE_INFINITY : -c)),
      );
    }
  }
  return { each, every: every === null ? null : Math.min(1, every), any: Math.max(0, 1 - inside) };
}

/** The claim as a one- or two-sided one against zero, after a shift of the truth. */
function claimOf(plan: FamilyPlan): { sides: FamilyPlan["sides"]; shift: number } {
  if (plan.margin === null) return { sides: plan.sides, shift: 0 };
  return plan.margin.better === "lower"
    ? { sides: "lower", shift: -plan.margin.value }
    : { sides: "upper", shift: plan.margin.value };
}

/** Own df of each comparison's t. */
function ownDfs(layout: PlanLayout, plan: FamilyPlan, df: number): number[] {
  const { errors } = closedFamily(layout, plan)!;
  if (errors.shared) return plan.contrasts.map(() => errors.commonDf(df));
  const blank = () => new Float64Array(plan.contrasts.length);
  const evidence = { deviations: blank(), standardErrors: blank(), df: blank() };
  const { groups, withinCells: width } = layout;
  // df do not depend on the numbers, only on where they come from: an identity in place of the products.
  const products = new Float64Array(width * width);
  for (let i = 0; i < width; i++) products[i * width + i] = df;
  errors.fill(
    {
      sizes: new Int32Array(groups).fill(2),
      means: new Float64Array(groups * width),
      products,
      ownProducts: new Float64Array(0),
      df,
      whole: true,
    },
    evidence,
  );
  return Array.from(evidence.df);
}

/** The own p at which the method rejects, found from its decider by bisection where it has no formula of its own here. */
function levelOf(plan: FamilyPlan, template: ReturnType<typeof templateOf>): number {
  const count = plan.contrasts.length;
  if (count === 1 || plan.correction === "none") return plan.error;
  if (plan.correction === "bonferroni") return plan.error / count;
  if (plan.correction === "sidak") return -Math.expm1(Math.log1p(-plan.error) / count);
  if (plan.correction === "single-step" || plan.correction === "dunnett")
    return jointLevel(template)(template.names.map((_, i) => i));
  const decide = familyDecider(plan.correction, template);
  const rejects = (level: number) => decide({ p: template.names.map((_, i) => (i === 0 ? level : 1)) })[0]!;
  let low = 0;
  let high = plan.error;
  for (let step = 0; step < 60; step++) {
    const middle = (low + high) / 2;
    if (rejects(middle)) low = middle;
    else high = middle;
  }
  return low;
}

/** Power of one omnibus effect by noncentral F, and whether that is exact. Null where only simulation tells. */
export function effectPower(
  layout: PlanLayout,
  effect: PlannedEffect,
  sizes: readonly number[],
  means: readonly number[],
  error: number,
): { readonly power: number; readonly exact: boolean; readonly noncentrality: number } | null {
  const plain =
    layout.shape === "normal" &&
    layout.residuals === null &&
    layout.missing === 0 &&
    layout.sameCovariance &&
    !(layout.errors === "separate" && layout.withinCells === 1);
  if (!plain) return null;
  const p = effect.within[0]!.length;
  const q = effect.between[0]!.length;
  const covariance = meanCovariance(layout, sizes);
  const scores = projected(effect.within, (i, j) => covariance[i]![j]!);
  const variance = scores.reduce((sum, row, i) => sum + row[i]!, 0) / p;
  const df = sizes.reduce((sum, size) => sum + size - 1, 0);
  const epsilon = effect.epsilon > 1 - 1e-9 ? 1 : effect.epsilon;
  const noncentrality = effectSquares(effect, layout, means, sizes) / variance;
  const df1 = epsilon * p * q;
  const df2 = epsilon * p * df;
  const power = noncentralFUpperTail(fUpperQuantile(error, df1, df2), df1, df2, epsilon * noncentrality);
  return { power, exact: epsilon === 1, noncentrality };
}
