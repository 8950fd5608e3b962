import { chiSquareUpperTail, DomainError, fUpperTail } from "../../numeric/index.ts";

export interface CovarianceTest {
  /** Box's M itself. */
  readonly m: number;
  /** M (1 - c) with Box's c, to be compared with chi-square of df1 (with one variable Bartlett's statistic is M / (1 + c)). */
  readonly chiSquare: number;
  readonly chiSquareP: number;
  /** Box's F approximation, better for more variables. */
  readonly f: number;
  readonly df1: number;
  readonly df2: number;
  readonly p: number;
}

/** log determinant of a symmetric matrix by Cholesky; null where it is not positive definite. */
function logDeterminant(matrix: ArrayLike<number>, size: number): number | null {
  const lower = Float64Array.from(matrix);
  let sum = 0;
  for (let column = 0; column < size; column++) {
    const before = lower[column * size + column]!;
    let pivot = before;
    for (let k = 0; k < column; k++) pivot -= lower[column * size + k]! ** 2;
    if (!(pivot > 1e-12 * before)) return null;
    const root = Math.sqrt(pivot);
    sum += 2 * Math.log(root);
    lower[column * size + column] = root;
    for (let row = column + 1; row < size; row++) {
      let value = lower[row * size + column]!;
      for (let k = 0; k < column; k++) value -= lower[row * size + k]! * lower[column * size + k]!;
      lower[row * size + column] = value / root;
    }
  }
  return sum;
}

/**
 * Box's test that groups share one covariance matrix.
 *
 * @param products sums of squares and products of each group around its own mean, variables x variables, row by row
 * @param df degrees of freedom of each group (subjects - 1)
 * @param variables number of variables
 * @returns null where a group has no more df than variables allow (its matrix is singular), or there is one group
 * @throws DomainError for matrices of the wrong size
 * @source box-1949 (Biometrika 36, 317-346)
 */
export function boxM(
  products: readonly ArrayLike<number>[],
  df: readonly number[],
  variables: number,
): CovarianceTest | null {
  for (const product of products) {
    if (product.length !== variables ** 2)
      throw new DomainError("products", product.length, `${variables ** 2} entries`);
  }
  const groups = products.length;
  if (groups < 2 || df.some((value) => value < variables)) return null;
  const total = df.reduce((sum, value) => sum + value, 0);
  const pooled = new Float64Array(variables ** 2);
  for (const product of products) for (let at = 0; at < pooled.length; at++) pooled[at]! += product[at]! / total;
  const whole = logDeterminant(pooled, variables);
  if (whole === null) return null;
  let m = total * whole;
  for (const [group, product] of products.entries()) {
    const own = logDeterminant(
      Array.from(product, (value) => value / df[group]!),
      variables,
    );
    if (own === null) return null;
    m -= df[group]! * own;
  }
  const p = variables;
  const inverse = (power: number) => df.reduce((sum, value) => sum + value ** -power, 0) - total ** -power;
  const first = (inverse(1) * (2 * p * p + 3 * p - 1)) / (6 * (p + 1) * (groups - 1));
  const second = (inverse(2) * (p - 1) * (p + 2)) / (6 * (groups - 1));
  const df1 = (p * (p + 1) * (groups - 1)) / 2;
  const chiSquare = m * (1 - first);
  const gap = second - first ** 2;
  const df2 = (df1 + 2) / Math.abs(gap);
  // Two forms of the approximation, by whether the cumulants call for a longer or a shorter tail.
  const f = gap > 0 ? (m * (1 - first - df1 / df2)) / df1 : (df2 * m) / (df1 * (df2 / (1 - first + 2 / df2) - m));
  return {
    m,
    chiSquare,
    chiSquareP: chiSquareUpperTail(Math.max(0, chiSquare), df1),
    f,
    df1,
    df2,
    p: f < 0 ? 0 : fUpperTail(f, df1, df2),
  };
}
