import { effectBasis, subsets } from "../models/index.ts";
import type { DrawnStudy } from "./draw-study.ts";
import type { PlanLayout } from "./layout.ts";

/** What the analysis would find of each comparison in one study; overwritten by every study. */
export interface Evidence {
  /** Estimate minus true value. */
  readonly deviations: Float64Array;
  readonly standardErrors: Float64Array;
  readonly df: Float64Array;
}

export interface ContrastErrors {
  /** Fills the evidence of a study. */
  readonly fill: (study: DrawnStudy, evidence: Evidence) => void;
  /** Correlation of the estimates as the analysis estimates it, from the study last given to `fill`. */
  readonly correlation: () => number[][];
  /** True where all comparisons share one error term whose df is `commonDf`. */
  readonly shared: boolean;
  /** df of the shared error term in a study with these subjects minus groups. */
  readonly commonDf: (df: number) => number;
  /** True for a comparison whose t is exactly a t: one direction of scores, or one part of the pooled error under sphericity. */
  readonly exact: readonly boolean[];
}

const dot = (left: ArrayLike<number>, right: ArrayLike<number>) => {
  let sum = 0;
  for (let index = 0; index < left.length; index++) sum += left[index]! * right[index]!;
  return sum;
};
const norm = (vector: ArrayLike<number>) => Math.sqrt(dot(vector, vector));

/** The direction that all groups' weights share, or null. */
function sharedDirection(byGroup: readonly Float64Array[]): Float64Array | null {
  const longest = byGroup.reduce((best, next) => (norm(next) > norm(best) ? next : best));
  const length = norm(longest);
  const along = byGroup.every((vector) => {
    const share = dot(vector, longest) / (length * length);
    return vector.every((value, index) => Math.abs(value - share * longest[index]!) <= 1e-10 * length);
  });
  return along ? longest : null;
}

const parallel = (left: Float64Array, right: Float64Array) =>
  Math.abs(Math.abs(dot(left, right)) - norm(left) * norm(right)) <= 1e-10 * norm(left) * norm(right);

/**
 * Standard errors and df as the comparisons of the models room have them (their agreement is tested): contrast scores with the error
 * pooled over groups, each group's own error, or under sphericity the error pooled over the within contrasts.
 *
 * @param weights  per comparison, over groups x within cells
 */
export function contrastErrors(layout: PlanLayout, weights: readonly (readonly number[])[]): ContrastErrors {
  const { groups, withinCells: width } = layout;
  const count = weights.length;
  const parts = weights.map((row) =>
    Array.from({ length: groups }, (_, group) => Float64Array.from(row.slice(group * width, (group + 1) * width))),
  );
  const directions = parts.map(sharedDirection);
  const pooledShared =
    directions.every((direction) => direction !== null) &&
    directions.every((direction) => parallel(direction!, directions[0]!));
  const flat = Float64Array.from(weights.flat());
  const deviations = (study: DrawnStudy, evidence: Evidence) => {
    const size = groups * width;
    for (let i = 0; i < count; i++) {
      let sum = 0;
      for (let at = 0; at < size; at++) sum += flat[i * size + at]! * study.means[at]!;
      evidence.deviations[i] = sum;
    }
  };
  const form = (left: Float64Array, matrix: Float64Array, offset: number, right: Float64Array) => {
    let total = 0;
    for (let i = 0; i < width; i++) {
      if (left[i] === 0) continue;
      let sum = 0;
      for (let j = 0; j < width; j++) sum += matrix[offset + i * width + j]! * right[j]!;
      total += left[i]! * sum;
    }
    return total;
  };
  let last: DrawnStudy | null = null;
  const correlationBy = (covariance: (i: number, j: number) => number) => (): number[][] => {
    const variances = weights.map((_, i) => covariance(i, i));
    return weights.map((_, i) =>
      weights.map((__, j) => (i === j ? 1 : covariance(i, j) / Math.sqrt(variances[i]! * variances[j]!))),
    );
  };

  if (layout.errors === "separate") {
    const part = (group: number, i: number, j: number) =>
      form(parts[i]![group]!, last!.ownProducts, group * width * width, parts[j]![group]!) /
      ((last!.sizes[group]! - 1) * last!.sizes[group]!);
    const covariance = (i: number, j: number) => {
      let sum = 0;
      for (let group = 0; group < groups; group++) sum += part(group, i, j);
      return sum;
    };
    return {
      fill(study, evidence) {
        last = study;
        deviations(study, evidence);
        for (let i = 0; i < count; i++) {
          let sum = 0;
          let below = 0;
          for (let group = 0; group < groups; group++) {
            const own = part(group, i, i);
            sum += own;
            below += own ** 2 / (study.sizes[group]! - 1);
          }
          evidence.standardErrors[i] = Math.sqrt(sum);
          evidence.df[i] = sum ** 2 / below;
        }
      },
      correlation: correlationBy(covariance),
      shared: false,
      commonDf: (df) => df,
      exact: weights.map(() => false),
    };
  }

  if (layout.errors === "spherical") {
    const columns = (basis: number[][]) => basis[0]!.map((_, at) => Float64Array.from(basis, (row) => row[at]!));
    const touched: Float64Array[] = [];
    for (const flags of subsets(layout.withinLevels.length)) {
      const basis = columns(effectBasis(layout.withinLevels, flags));
      if (parts.some((byGroup) => byGroup.some((w) => basis.some((b) => Math.abs(dot(b, w)) > 1e-10 * norm(w)))))
        touched.push(...basis);
    }
    const mean = new Float64Array(width).fill(1 / Math.sqrt(width));
    const along = parts.map((byGroup) => byGroup.map((w) => dot(mean, w)));
    const whole = parts.map((byGroup, i) => byGroup.map((w, g) => dot(w, w) - along[i]![g]! ** 2));
    const only = parts.map((byGroup, i) => {
      const total = byGroup.reduce((sum, w) => sum + dot(w, w), 0);
      const flatPart = along[i]!.reduce((sum, value) => sum + value ** 2, 0);
      if (flatPart < 1e-12 * total) return 1;
      return whole[i]!.reduce((sum, value) => sum + value, 0) < 1e-12 * total ? 0 : -1;
    });
    const columnsTouched = Math.max(1, touched.length);
    let flatSquare = 0;
    let restSquare = 0;
    const covariance = (i: number, j: number) => {
      let sum = 0;
      for (let group = 0; group < groups; group++) {
        const flatPart = along[i]![group]! * along[j]![group]!;
        const rest = dot(parts[i]![group]!, parts[j]![group]!) - flatPart;
        sum += (flatPart * flatSquare + rest * restSquare) / last!.sizes[group]!;
      }
      return sum;
    };
    const one = only[0]!;
    return {
      fill(study, evidence) {
        last = study;
        deviations(study, evidence);
        flatSquare = form(mean, study.products, 0, mean) / study.df;
        restSquare = 0;
        for (const column of touched) restSquare += form(column, study.products, 0, column);
        restSquare /= columnsTouched * study.df;
        for (let i = 0; i < count; i++) {
          let first = 0;
          let second = 0;
          for (let group = 0; group < groups; group++) {
            first += along[i]![group]! ** 2 / study.sizes[group]!;
            second += whole[i]![group]! / study.sizes[group]!;
          }
          first = only[i] === 1 ? 0 : first * flatSquare;
          second = only[i] === 0 ? 0 : second * restSquare;
          evidence.standardErrors[i] = Math.sqrt(first + second);
          evidence.df[i] =
            only[i] === 0
              ? study.df
              : only[i] === 1
                ? columnsTouched * study.df
                : (first + second) ** 2 / (first ** 2 / study.df + second ** 2 / (columnsTouched * study.df));
        }
      },
      correlation: correlationBy(covariance),
      shared: one !== -1 && only.every((part) => part === one),
      commonDf: (df) => (one === 1 ? columnsTouched * df : df),
      exact: only.map((part) => part !== -1),
    };
  }

  const covariance = (i: number, j: number) => {
    let sum = 0;
    for (let group = 0; group < groups; group++)
      sum += form(parts[i]![group]!, last!.products, 0, parts[j]![group]!) / last!.sizes[group]!;
    return sum / last!.df;
  };
  return {
    fill(study, evidence) {
      last = study;
      deviations(study, evidence);
      for (let i = 0; i < count; i++) {
        const variance = covariance(i, i);
        evidence.standardErrors[i] = Math.sqrt(variance);
        if (directions[i] !== null) {
          evidence.df[i] = study.df;
          continue;
        }
        let squares = 0;
        for (let g = 0; g < groups; g++)
          for (let h = 0; h < groups; h++)
            squares +=
              (form(parts[i]![g]!, study.products, 0, parts[i]![h]!) / study.df) ** 2 /
              (study.sizes[g]! * study.sizes[h]!);
        evidence.df[i] = (study.df * variance ** 2) / squares;
      }
    },
    correlation: correlationBy(covariance),
    shared: pooledShared,
    commonDf: (df) => df,
    exact: directions.map((direction) => direction !== null),
  };
}
