/** Dense linear algebra of small to middling matrices, rows as arrays; the spectral part through ml-matrix. */
import { EigenvalueDecomposition, Matrix as DenseMatrix } from "ml-matrix";
import { DomainError } from "./domain-error.ts";

/** Rows of equal length. */
export type Matrix = readonly (readonly number[])[];

function requireRectangular(argument: string, matrix: Matrix): void {
  const columns = matrix[0]?.length ?? 0;
  for (const row of matrix) {
    if (row.length !== columns)
      throw new DomainError(argument, `a row of ${row.length}`, `rows of equal length, ${columns}`);
    for (const value of row) if (!Number.isFinite(value)) throw new DomainError(argument, value, "finite entries");
  }
}

/** Lets a symmetric matrix of finite numbers pass (differences below 1e-10 of the largest entry are rounding). */
export function requireSymmetric(argument: string, matrix: Matrix): void {
  requireRectangular(argument, matrix);
  const size = matrix.length;
  if (size > 0 && matrix[0]!.length !== size)
    throw new DomainError(argument, `${size} x ${matrix[0]!.length}`, "a square matrix");
  let largest = 0;
  for (const row of matrix) for (const value of row) largest = Math.max(largest, Math.abs(value));
  for (let i = 0; i < size; i++) {
    for (let j = 0; j < i; j++) {
      if (!(Math.abs(matrix[i]![j]! - matrix[j]![i]!) <= 1e-10 * largest)) {
        throw new DomainError(argument, `${matrix[i]![j]} against ${matrix[j]![i]}`, "a symmetric matrix");
      }
    }
  }
}

/**
 * Lower triangular L with L L' = matrix.
 *
 * @param matrix symmetric, p x p; the lower triangle is read
 * @throws DomainError when it is not symmetric or not positive definite
 */
export function choleskyFactor(matrix: Matrix): number[][] {
  requireSymmetric("matrix", matrix);
  const size = matrix.length;
  const factor: number[][] = [];
  for (let i = 0; i < size; i++) {
    const row = new Array<number>(size).fill(0);
    for (let j = 0; j <= i; j++) {
      let sum = matrix[i]![j]!;
      const other = j === i ? row : factor[j]!;
      for (let k = 0; k < j; k++) sum -= row[k]! * other[k]!;
      if (j < i) row[j] = sum / other[j]!;
      else {
        if (!(sum > 0)) throw new DomainError("matrix", `pivot ${sum}`, "a positive definite matrix");
        row[i] = Math.sqrt(sum);
      }
    }
    factor.push(row);
  }
  return factor;
}

/** Solves L L' x = right for x. @param factor from `choleskyFactor` @param right one value per row */
export function choleskySolve(factor: Matrix, right: readonly number[]): number[] {
  const size = factor.length;
  if (right.length !== size) throw new DomainError("right", `${right.length} values`, `${size} values`);
  const x = [...right];
  for (let i = 0; i < size; i++) {
    const row = factor[i]!;
    let sum = x[i]!;
    for (let k = 0; k < i; k++) sum -= row[k]! * x[k]!;
    x[i] = sum / row[i]!;
  }
  for (let i = size - 1; i >= 0; i--) {
    let sum = x[i]!;
    for (let k = i + 1; k < size; k++) sum -= factor[k]![i]! * x[k]!;
    x[i] = sum / factor[i]![i]!;
  }
  return x;
}

export interface SymmetricEigen {
  /** Eigenvalues, largest first. */
  readonly values: readonly number[];
  /** One unit vector per eigenvalue, in the same order. */
  readonly vectors: Matrix;
}

/** Eigenvalues and vectors of a symmetric matrix (tridiagonal reduction and implicit QL, ml-matrix). @throws DomainError when it is not symmetric */
export function symmetricEigen(matrix: Matrix): SymmetricEigen {
  requireSymmetric("matrix", matrix);
  if (matrix.length === 0) return { values: [], vectors: [] };
  const found = new EigenvalueDecomposition(new DenseMatrix(matrix as number[][]), { assumeSymmetric: true });
  const order = found.realEigenvalues
    .map((_, i) => i)
    .sort((a, b) => found.realEigenvalues[b]! - found.realEigenvalues[a]!);
  const columns = found.eigenvectorMatrix;
  return {
    values: order.map((i) => found.realEigenvalues[i]!),
    vectors: order.map((i) => matrix.map((_, row) => columns.get(row, i))),
  };
}

/** Determinant by elimination with row exchanges. @throws DomainError when the matrix is not square or not finite */
export function determinant(matrix: Matrix): number {
  requireRectangular("matrix", matrix);
  const size = matrix.length;
  if (size > 0 && matrix[0]!.length !== size)
    throw new DomainError("matrix", `${size} x ${matrix[0]!.length}`, "a square matrix");
  const left = matrix.map((row) => [...row]);
  let product = 1;
  for (let k = 0; k < size; k++) {
    let pivot = k;
    for (let i = k + 1; i < size; i++) if (Math.abs(left[i]![k]!) > Math.abs(left[pivot]![k]!)) pivot = i;
    if (left[pivot]![k] === 0) return 0;
    if (pivot !== k) {
      const held = left[k]!;
      left[k] = left[pivot]!;
      left[pivot] = held;
      product = -product;
    }
    const top = left[k]!;
    product *= top[k]!;
    for (let i = k + 1; i < size; i++) {
      const row = left[i]!;
      const ratio = row[k]! / top[k]!;
      if (ratio !== 0) for (let j = k + 1; j < size; j++) row[j]! -= ratio * top[j]!;
    }
  }
  return product;
}

export interface SemidefiniteFactor {
  /** p x rank: factor times its transpose is the matrix. */
  readonly factor: Matrix;
  readonly rank: number;
  /** The rows in the order in which they were taken as pivots; the first `rank` of them are independent. */
  readonly pivots: readonly number[];
}

/**
 * A factor of a positive semidefinite matrix with as many columns as its rank: Cholesky with the largest diagonal first.
 *
 * @param matrix symmetric, p x p
 * @param tolerance a remaining diagonal below this part of the largest one counts as zero; also how far below zero it may be
 * @throws DomainError when the matrix is not symmetric or has a negative eigenvalue beyond the tolerance
 * @source Higham (2002), Accuracy and Stability of Numerical Algorithms, 10.3
 */
export function semidefiniteFactor(matrix: Matrix, tolerance = 1e-12): SemidefiniteFactor {
  requireSymmetric("matrix", matrix);
  const size = matrix.length;
  const left = matrix.map((row) => [...row]);
  const factor: number[][] = matrix.map(() => []);
  const pivots: number[] = [];
  const remaining = matrix.map((_, i) => i);
  let scale = 0;
  for (let i = 0; i < size; i++) scale = Math.max(scale, Math.abs(matrix[i]![i]!));
  while (remaining.length > 0) {
    let best = 0;
    for (let k = 1; k < remaining.length; k++) {
      if (left[remaining[k]!]![remaining[k]!]! > left[remaining[best]!]![remaining[best]!]!) best = k;
    }
    const pivot = remaining[best]!;
    const size2 = left[pivot]![pivot]!;
    if (!(size2 > tolerance * size * scale)) {
      // what is left must be zero, not negative and not off the diagonal
      for (const i of remaining) {
        for (const j of remaining) {
          const rest = left[i]![j]!;
          const allowed = i === j ? tolerance * size * scale : Math.sqrt(tolerance * size) * scale;
          if (rest < -allowed || (i !== j && rest > allowed)) {
            throw new DomainError("matrix", `a remainder of ${rest}`, "a positive semidefinite matrix");
          }
        }
      }
      break;
    }
    remaining.splice(best, 1);
    pivots.push(pivot);
    const root = Math.sqrt(size2);
    factor[pivot]!.push(root);
    for (const i of remaining) factor[i]!.push(left[i]![pivot]! / root);
    for (const i of remaining) {
      const fi = factor[i]!.at(-1)!;
      for (const j of remaining) left[i]![j]! -= fi * factor[j]!.at(-1)!;
    }
  }
  const rank = pivots.length;
  for (const row of factor) while (row.length < rank) row.push(0);
  return { factor, rank, pivots: [...pivots, ...remaining] };
}
