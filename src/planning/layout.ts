import { cellCount, levelsOfCell } from "../design/index.ts";
import { symmetricEigen } from "../numeric/index.ts";
import { PlanningError } from "./problem.ts";
import type { ObservedDesign, PlanningDesign, ScoreShape } from "./types.ts";

/** How the standard errors are made, as the analysis will make them. */
export type ErrorTerm = "pooled" | "separate" | "spherical";

/** A design by between group and within cell: all that simulation and closed forms work from. Plain data. */
export interface PlanLayout {
  readonly groups: number;
  readonly withinCells: number;
  readonly betweenLevels: readonly number[];
  readonly withinLevels: readonly number[];
  /** Cell of the full cross for each group and within cell, groups x within cells. */
  readonly cellOf: readonly number[];
  /** True means, groups x within cells. */
  readonly means: readonly number[];
  /** Covariance of the within cells in each group. */
  readonly covariances: readonly (readonly (readonly number[])[])[];
  readonly sameCovariance: boolean;
  readonly errors: ErrorTerm;
  readonly shape: ScoreShape;
  /** Share of cells missing at random; a subject enters only when complete. */
  readonly missing: number;
  /** Standardised residuals to draw from in place of a shape. */
  readonly residuals: readonly number[] | null;
}

/** The design by group and within cell, under its own expectations or with what was observed. */
export function layoutOf(design: PlanningDesign, observed: ObservedDesign | null = null): PlanLayout {
  const { factors } = design;
  const between = factors.filter((factor) => factor.varies === "between");
  const within = factors.filter((factor) => factor.varies === "within");
  const groups = cellCount(between);
  const withinCells = cellCount(within);
  const cellOf = new Array<number>(groups * withinCells).fill(0);
  for (let cell = 0; cell < cellCount(factors); cell++) {
    let group = 0;
    let place = 0;
    for (const [index, level] of levelsOfCell(factors, cell).entries()) {
      const count = factors[index]!.levels.length;
      if (factors[index]!.varies === "between") group = group * count + level;
      else place = place * count + level;
    }
    cellOf[group * withinCells + place] = cell;
  }
  const { correlation } = design;
  const correlated = (i: number, j: number) =>
    i === j ? 1 : typeof correlation === "number" ? correlation : correlation[i]![j]!;
  const indices = Array.from({ length: withinCells }, (_, index) => index);
  const covariances =
    observed?.covariances ??
    Array.from({ length: groups }, (_, group) => {
      const spread = (place: number) => design.cellSpread[cellOf[group * withinCells + place]!]!;
      return indices.map((i) => indices.map((j) => spread(i) * spread(j) * correlated(i, j)));
    });
  const scale = Math.max(...covariances.flat(2).map(Math.abs));
  const sameCovariance = covariances.every((one) =>
    one.every((row, i) => row.every((value, j) => Math.abs(value - covariances[0]![i]![j]!) <= 1e-12 * scale)),
  );
  const spherical =
    within.length > 0 && (design.covariance === "sphericity" || design.covariance === "compound symmetry");
  const means = observed?.cellMeans ?? design.cellMeans;
  return {
    groups,
    withinCells,
    betweenLevels: between.map((factor) => factor.levels.length),
    withinLevels: within.map((factor) => factor.levels.length),
    cellOf,
    means: cellOf.map((cell) => means[cell]!),
    covariances,
    sameCovariance,
    errors: spherical ? "spherical" : design.variances === "unequal" && groups > 1 ? "separate" : "pooled",
    shape: design.shape,
    missing: observed === null ? design.missing : 0,
    residuals: observed?.residuals ?? null,
  };
}

/** Weights of a comparison over groups x within cells, from those over the cells of the full cross. */
export function placedWeights(layout: PlanLayout, weights: ArrayLike<number>): number[] {
  return layout.cellOf.map((cell) => weights[cell]!);
}

/** Total subjects that give every group the exact share, or 1 where the shares are no small whole numbers. */
export function subjectStep(allocation: readonly number[]): number {
  const least = Math.min(...allocation);
  for (let times = 1; times <= 12; times++) {
    const parts = allocation.map((share) => (share / least) * times);
    if (parts.every((part) => Math.abs(part - Math.round(part)) < 1e-9)) {
      const sum = parts.reduce((total, part) => total + Math.round(part), 0);
      return sum <= 120 ? sum : 1;
    }
  }
  return 1;
}

/**
 * Subjects of each group: proportional to the shares, whole, by largest remainders.
 * @throws PlanningError "too-few-subjects" where a group would have fewer than two
 */
export function groupSizes(allocation: readonly number[], subjects: number): number[] {
  const total = allocation.reduce((sum, share) => sum + share, 0);
  const exact = allocation.map((share) => (share / total) * subjects);
  const sizes = exact.map((value) => Math.floor(value + 1e-9));
  const order = exact.map((_, group) => group).sort((a, b) => exact[b]! - sizes[b]! - (exact[a]! - sizes[a]!) || a - b);
  let rest = subjects - sizes.reduce((sum, size) => sum + size, 0);
  for (const group of order) if (rest-- > 0) sizes[group]!++;
  if (!Number.isInteger(subjects) || sizes.some((size) => size < 2)) {
    throw new PlanningError(
      "too-few-subjects",
      `${subjects} subjects over ${allocation.length} ${allocation.length === 1 ? "group" : "groups"} are too few.`,
      "Every group needs at least two subjects.",
    );
  }
  return sizes;
}

/** Symmetric square root of a covariance, row per within cell: scores = root times independent variates. */
export function symmetricRoot(covariance: readonly (readonly number[])[]): number[][] {
  const { values, vectors } = symmetricEigen(covariance);
  return covariance.map((_, i) =>
    covariance.map((__, j) =>
      values.reduce((sum, value, k) => sum + Math.sqrt(Math.max(0, value)) * vectors[k]![i]! * vectors[k]![j]!, 0),
    ),
  );
}
