import type { FactorDeclaration } from "../design/types.ts";
import { effectBasis, greenhouseGeisserEpsilon, subsets, welchFactorialAnalysis } from "../models/index.ts";
import { choleskyFactor, choleskySolve, fUpperTail } from "../numeric/index.ts";
import type { DrawnStudy } from "./draw-study.ts";
import type { PlanLayout } from "./layout.ts";
import { PlanningError } from "./problem.ts";
import type { OmnibusPlan, PlanningDesign } from "./types.ts";

/** One effect of a design: bases over the between groups and over the within cells (rows: groups or cells). */
export interface PlannedEffect {
  readonly name: string;
  readonly between: readonly (readonly number[])[];
  readonly within: readonly (readonly number[])[];
  /** Box's epsilon of the expected covariance; 1 where one within direction or sphericity. */
  readonly epsilon: number;
}

const columnsOf = (basis: readonly (readonly number[])[]) => basis[0]!.length;

/** basis' covariance basis. */
export function projected(
  basis: readonly (readonly number[])[],
  covariance: (i: number, j: number) => number,
): number[][] {
  const p = columnsOf(basis);
  return Array.from({ length: p }, (_, a) =>
    Array.from({ length: p }, (__, b) => {
      let sum = 0;
      for (const [i, left] of basis.entries())
        for (const [j, right] of basis.entries()) sum += left[a]! * covariance(i, j) * right[b]!;
      return sum;
    }),
  );
}

/** Subjects-weighted mean of the groups' covariances, which the pooled error estimates. */
export function meanCovariance(layout: PlanLayout, sizes: readonly number[]): number[][] {
  const df = sizes.reduce((sum, size) => sum + size - 1, 0);
  return layout.covariances[0]!.map((row, i) =>
    row.map((_, j) =>
      layout.covariances.reduce((sum, one, group) => sum + ((sizes[group]! - 1) / df) * one[i]![j]!, 0),
    ),
  );
}

/** Numerator of an effect: sum of squares that its means have, per group sizes (weights of cells equal). */
export function effectSquares(
  effect: PlannedEffect,
  layout: PlanLayout,
  means: ArrayLike<number>,
  sizes: ArrayLike<number>,
): number {
  const { groups, withinCells: width } = layout;
  const q = columnsOf(effect.between);
  const p = columnsOf(effect.within);
  const cross = Array.from({ length: q }, (_, a) =>
    Array.from({ length: q }, (__, b) => {
      let sum = 0;
      for (let g = 0; g < groups; g++) sum += (effect.between[g]![a]! * effect.between[g]![b]!) / sizes[g]!;
      return sum;
    }),
  );
  const factor = q === 1 ? null : choleskyFactor(cross);
  let total = 0;
  for (let column = 0; column < p; column++) {
    const right = new Array<number>(q).fill(0);
    for (let g = 0; g < groups; g++) {
      let score = 0;
      for (let w = 0; w < width; w++) score += effect.within[w]![column]! * means[g * width + w]!;
      for (let a = 0; a < q; a++) right[a]! += effect.between[g]![a]! * score;
    }
    if (factor === null) total += right[0]! ** 2 / cross[0]![0]!;
    else {
      const solved = choleskySolve(factor, right);
      for (let a = 0; a < q; a++) total += right[a]! * solved[a]!;
    }
  }
  return total;
}

/** Every effect of the design, or those asked for; with none asked for, those of which a difference is expected. */
export function plannedEffects(design: PlanningDesign, layout: PlanLayout, plan: OmnibusPlan): PlannedEffect[] {
  const { factors } = design;
  const between = factors.filter((factor) => factor.varies === "between");
  const within = factors.filter((factor) => factor.varies === "within");
  const ones = layout.means.map(() => 1);
  const scale = layout.means.reduce((sum, mean) => sum + mean ** 2, 0) + layout.covariances[0]![0]![0]!;
  const covariance = meanCovariance(layout, new Array<number>(layout.groups).fill(2));
  const effectOf = (names: readonly string[]): PlannedEffect => {
    const takes = (factor: FactorDeclaration) => names.includes(factor.name);
    const withinBasis = effectBasis(layout.withinLevels, within.map(takes));
    const scores = projected(withinBasis, (i, j) => covariance[i]![j]!);
    return {
      name: factors
        .filter(takes)
        .map((factor) => factor.name)
        .join(" x "),
      between: effectBasis(layout.betweenLevels, between.map(takes)),
      within: withinBasis,
      epsilon: scores.length === 1 ? 1 : greenhouseGeisserEpsilon(scores),
    };
  };
  if (plan.effects !== null) {
    for (const name of plan.effects.flat()) {
      if (factors.some((factor) => factor.name === name)) continue;
      throw new PlanningError(
        "unknown-factor",
        `There is no factor "${name}".`,
        `Declared are ${factors.map((factor) => `"${factor.name}"`).join(", ")}.`,
        name,
      );
    }
    return plan.effects.map(effectOf);
  }
  const all = subsets(factors.length).map((flags) =>
    effectOf(factors.flatMap((factor, i) => (flags[i] ? [factor.name] : []))),
  );
  return all.filter((effect) => effectSquares(effect, layout, layout.means, ones) > 1e-18 * scale);
}

/**
 * p of the omnibus tests in one study. Equal variances: F with equally weighted cells; where the expected covariance is not
 * spherical for the effect, with the df corrected by the epsilon estimated in the study (Greenhouse & Geisser 1959).
 * Unequal variances, between subjects only: the general form of Welch's test (Johansen 1980).
 */
export function omnibusTests(design: PlanningDesign, layout: PlanLayout, effects: readonly PlannedEffect[]) {
  const { groups, withinCells: width } = layout;
  const means = new Float64Array(groups * width);
  return (study: DrawnStudy, truths: readonly number[]): number[] => {
    for (let at = 0; at < means.length; at++) means[at] = study.means[at]! + truths[at]!;
    if (layout.errors === "separate" && width === 1) {
      const answer = welchFactorialAnalysis(
        { center: 0, n: Float64Array.from(study.sizes), mean: means, sumOfSquares: study.ownProducts },
        design.factors,
      );
      return effects.map((effect) => answer.effects.find((one) => one.effect === effect.name)?.p ?? 1);
    }
    return effects.map((effect) => {
      const p = columnsOf(effect.within);
      const q = columnsOf(effect.between);
      const scores = projected(effect.within, (i, j) => study.products[i * width + j]!);
      const error = scores.reduce((sum, row, i) => sum + row[i]!, 0) / (p * study.df);
      const ratio = effectSquares(effect, layout, means, study.sizes) / (p * q * error);
      const epsilon = effect.epsilon > 1 - 1e-9 ? 1 : greenhouseGeisserEpsilon(scores);
      return fUpperTail(ratio, epsilon * p * q, epsilon * p * study.df);
    });
  };
}
