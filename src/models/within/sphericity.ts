import { chiSquareUpperTail, DomainError } from "../../numeric/index.ts";

type Matrix = readonly (readonly number[])[];

/** What departures from sphericity need: the first two power sums of the roots, and the determinant. */
function rootsOf(covariance: Matrix): { trace: number; squares: number; logDeterminant: number } {
  const size = covariance.length;
  let trace = 0;
  let squares = 0;
  for (let row = 0; row < size; row++) {
    trace += covariance[row]![row]!;
    for (let column = 0; column < size; column++) squares += covariance[row]![column]! ** 2;
  }
  return { trace, squares, logDeterminant: logDeterminant(covariance) };
}

/** Log determinant by Cholesky; -Infinity where the matrix is singular to working precision. */
function logDeterminant(covariance: Matrix): number {
  const size = covariance.length;
  const factor = covariance.map((row) => [...row]);
  let sum = 0;
  for (let column = 0; column < size; column++) {
    let pivot = factor[column]![column]!;
    for (let before = 0; before < column; before++) pivot -= factor[column]![before]! ** 2;
    if (!(pivot > 1e-13 * covariance[column]![column]!)) return Number.NEGATIVE_INFINITY;
    const root = Math.sqrt(pivot);
    factor[column]![column] = root;
    sum += Math.log(pivot);
    for (let row = column + 1; row < size; row++) {
      let value = factor[row]![column]!;
      for (let before = 0; before < column; before++) value -= factor[row]![before]! * factor[column]![before]!;
      factor[row]![column] = value / root;
    }
  }
  return sum;
}

/**
 * Box's epsilon as estimated by Greenhouse and Geisser, from the covariance of orthonormal contrast scores.
 * @param covariance p x p covariance of the scores of p orthonormal contrasts, row per contrast
 * @returns between 1/p and 1
 * @source box-1954 (Ann. Math. Stat. 25, 484-498); greenhouse-geisser-1959 (Psychometrika 24, 95-112)
 */
export function greenhouseGeisserEpsilon(covariance: Matrix): number {
  const { trace, squares } = rootsOf(covariance);
  if (!(squares > 0)) throw new DomainError("covariance", trace, "a covariance with some variance");
  return trace ** 2 / (covariance.length * squares);
}

/**
 * Huynh and Feldt's epsilon with Lecoutre's correction for several groups, not capped.
 * @param epsilon Greenhouse-Geisser's
 * @param contrasts p, number of orthonormal contrasts
 * @param subjects N in all
 * @param groups g, number of groups whose covariances were pooled
 * @returns may exceed 1; Infinity where its denominator is not positive
 * @source huynh-feldt-1976 (J. Educ. Stat. 1, 69-82); lecoutre-1991 (J. Educ. Stat. 16, 371-372)
 */
export function huynhFeldtEpsilon(epsilon: number, contrasts: number, subjects: number, groups: number): number {
  const df = subjects - groups;
  const below = contrasts * (df - contrasts * epsilon);
  // With as few subjects as contrasts nothing speaks against sphericity in this estimate: it has no finite value.
  if (!(below > 0)) return Number.POSITIVE_INFINITY;
  return ((df + 1) * contrasts * epsilon - 2) / below;
}

/** Mauchly's test that the contrast scores have equal variances and no correlation. */
export interface MauchlyTest {
  readonly w: number;
  /** -(df - (2p^2+p+2)/(6p)) ln W, referred to chi-square with Box's second-order term. */
  readonly statistic: number;
  readonly df: number;
  readonly p: number;
}

/**
 * Mauchly's test of sphericity, p with the second-order term of Box's expansion.
 *
 * @param covariance p x p covariance of orthonormal contrast scores, p >= 2
 * @param errorDf degrees of freedom of that covariance; at least p, otherwise the determinant is zero
 * @returns null where the covariance is singular (fewer degrees of freedom than contrasts)
 * @source mauchly-1940 (Ann. Math. Stat. 11, 204-209); box-1949 (Biometrika 36, 317-346); Anderson, An Introduction to
 * Multivariate Statistical Analysis, section 10.7
 */
export function mauchlyTest(covariance: Matrix, errorDf: number): MauchlyTest | null {
  const size = covariance.length;
  if (size < 2 || errorDf < size) return null;
  const { trace, logDeterminant: logDet } = rootsOf(covariance);
  if (logDet === Number.NEGATIVE_INFINITY || !(trace > 0)) return null;
  // Rounding can lift ln W a little above 0 where W is 1.
  const logW = Math.min(0, logDet - size * Math.log(trace / size));
  const df = (size * (size + 1)) / 2 - 1;
  const scale = errorDf - (2 * size ** 2 + size + 2) / (6 * size);
  const statistic = -scale * logW;
  const secondOrder =
    ((size + 2) * (size - 1) * (size - 2) * (2 * size ** 3 + 6 * size ** 2 + 3 * size + 2)) /
    (288 * size ** 2 * scale ** 2);
  const first = chiSquareUpperTail(statistic, df);
  const p = first + secondOrder * (chiSquareUpperTail(statistic, df + 4) - first);
  return { w: Math.exp(logW), statistic, df, p: Math.min(1, Math.max(0, p)) };
}
