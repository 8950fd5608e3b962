import { CholeskyDecomposition, EigenvalueDecomposition, Matrix } from "ml-matrix";
import { fUpperTail } from "../../numeric/index.ts";
import type { OmnibusEffect } from "../../results/index.ts";

/** One multivariate criterion with its F approximation. */
export interface MultivariateTest {
  readonly form: "Pillai" | "Wilks" | "Hotelling-Lawley" | "Roy";
  /** Value of the criterion itself. */
  readonly criterion: number;
  readonly value: number;
  readonly df1: number;
  readonly df2: number;
  readonly p: number;
}

/** Roots of the hypothesis matrix in the metric of the error matrix, largest first; null where the error matrix is singular. */
function rootsInErrorMetric(hypothesis: number[][], error: number[][]): number[] | null {
  const size = error.length;
  // Scaled to unit diagonal first, so that "singular" does not depend on the response's unit.
  const scale = error.map((row, index) => 1 / Math.sqrt(row[index]!));
  if (scale.some((value) => !Number.isFinite(value))) return null;
  const scaled = (matrix: number[][]) =>
    new Matrix(matrix.map((row, i) => row.map((value, j) => value * (scale[i]! * scale[j]!))));
  const cholesky = new CholeskyDecomposition(scaled(error));
  if (!cholesky.isPositiveDefinite()) return null;
  const lower = cholesky.lowerTriangularMatrix;
  for (let index = 0; index < size; index++) if (lower.get(index, index) < 1e-7) return null;
  const half = forwardSolve(lower, scaled(hypothesis));
  const symmetric = forwardSolve(lower, half.transpose());
  for (let i = 0; i < size; i++) {
    for (let j = 0; j < i; j++) {
      const mean = (symmetric.get(i, j) + symmetric.get(j, i)) / 2;
      symmetric.set(i, j, mean);
      symmetric.set(j, i, mean);
    }
  }
  const roots = new EigenvalueDecomposition(symmetric, { assumeSymmetric: true }).realEigenvalues;
  return roots.map((root) => Math.max(0, root)).sort((left, right) => right - left);
}

function forwardSolve(lower: Matrix, right: Matrix): Matrix {
  const solved = right.clone();
  for (let column = 0; column < right.columns; column++) {
    for (let row = 0; row < right.rows; row++) {
      let value = solved.get(row, column);
      for (let before = 0; before < row; before++) value -= lower.get(row, before) * solved.get(before, column);
      solved.set(row, column, value / lower.get(row, row));
    }
  }
  return solved;
}

const test = (
  form: MultivariateTest["form"],
  criterion: number,
  value: number,
  df1: number,
  df2: number,
): MultivariateTest => ({ form, criterion, value, df1, df2, p: fUpperTail(value, df1, df2) });

/**
 * The four multivariate criteria of one hypothesis.
 *
 * @param hypothesis p x p sums of squares and products of the hypothesis
 * @param error p x p sums of squares and products of error
 * @param hypothesisDf q
 * @param errorDf degrees of freedom of the error matrix
 * @returns null where the error matrix is singular (errorDf < p, or scores that depend on each other)
 * @source pillai-1955 (Ann. Math. Stat. 26, 117-121); rao-1951 (Bull. Int. Stat. Inst. 33, 177-180) for Wilks's criterion;
 * mckeon-1974 (Biometrika 61, 381-383) for Hotelling-Lawley's; roy-1953 (Ann. Math. Stat. 24, 220-238): the F of Roy's root is
 * an upper bound, its p a lower one, unless min(p, q) is 1
 */
export function multivariateTests(
  hypothesis: number[][],
  error: number[][],
  hypothesisDf: number,
  errorDf: number,
): MultivariateTest[] | null {
  const p = error.length;
  const q = hypothesisDf;
  if (errorDf < p) return null;
  const roots = rootsInErrorMetric(hypothesis, error);
  if (roots === null) return null;
  const s = Math.min(p, q);
  const used = roots.slice(0, s);
  const pillai = used.reduce((sum, root) => sum + root / (1 + root), 0);
  const wilks = Math.exp(-used.reduce((sum, root) => sum + Math.log1p(root), 0));
  const trace = used.reduce((sum, root) => sum + root, 0);
  const largest = used[0] ?? 0;
  if (s === 1) {
    // One root: all four criteria are the same exact F.
    const df1 = p * q;
    const df2 = errorDf - p + 1;
    const value = (trace * df2) / df1;
    return [
      test("Pillai", pillai, value, df1, df2),
      test("Wilks", wilks, value, df1, df2),
      test("Hotelling-Lawley", trace, value, df1, df2),
      test("Roy", largest, value, df1, df2),
    ];
  }
  const m = (Math.abs(p - q) - 1) / 2;
  const n = (errorDf - p - 1) / 2;
  const pillaiDf1 = s * (2 * m + s + 1);
  const pillaiDf2 = s * (2 * n + s + 1);

  const power = Math.sqrt((p * p * q * q - 4) / (p * p + q * q - 5));
  const wilksDf2 = (errorDf + q - (p + q + 1) / 2) * power - (p * q - 2) / 2;
  const wilksRoot = wilks ** (1 / power);

  const hotelling =
    n > 1
      ? (() => {
          const b = ((p + 2 * n) * (q + 2 * n)) / (2 * (2 * n + 1) * (n - 1));
          const more = (p * q + 2) / (b - 1);
          const df2 = 4 + more;
          const c = (2 + more) / (2 * n);
          return test("Hotelling-Lawley", trace, ((trace / c) * df2) / (p * q), p * q, df2);
        })()
      : // McKeon's moments do not exist this low; Pillai and Samson (1959, Biometrika 46, 160-168).
        test(
          "Hotelling-Lawley",
          trace,
          (2 * (s * n + 1) * trace) / (s * s * (2 * m + s + 1)),
          pillaiDf1,
          2 * (s * n + 1),
        );

  const widest = Math.max(p, q);
  const royDf2 = errorDf - widest + q;
  return [
    test("Pillai", pillai, ((pillai / (s - pillai)) * pillaiDf2) / pillaiDf1, pillaiDf1, pillaiDf2),
    test("Wilks", wilks, ((1 - wilksRoot) / wilksRoot) * (wilksDf2 / (p * q)), p * q, wilksDf2),
    hotelling,
    ...(royDf2 > 0 ? [test("Roy", largest, (largest * royDf2) / widest, widest, royDf2)] : []),
  ];
}

/** The criteria as entries of an omnibus result. */
export function multivariateEffects(effect: string, tests: readonly MultivariateTest[]): OmnibusEffect[] {
  return tests.map(({ form, criterion, value, df1, df2, p }) => ({
    effect,
    method: "multivariate",
    form,
    statistic: "F",
    criterion,
    value,
    df1,
    df2,
    p,
  }));
}
