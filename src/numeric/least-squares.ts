/** Least squares by Householder reflections. */
import type { Matrix } from "./dense-linear-algebra.ts";
import { DomainError } from "./domain-error.ts";

export interface LeastSquares {
  /** One per column of the design; 0 for columns that depend on others. */
  readonly coefficients: readonly number[];
  /** Number of independent columns. */
  readonly rank: number;
  /** Columns that were taken, in the order taken; the others depend on them. */
  readonly columns: readonly number[];
  readonly residuals: readonly number[];
  readonly residualSumOfSquares: number;
  /** The response in the orthonormal basis: sums of squares of the taken columns, one after the other, are its first `rank` entries squared. */
  readonly effects: readonly number[];
  /** rank x rank upper triangle, columns in the order of `columns`. */
  readonly triangle: Matrix;
}

/**
 * Least squares fit of a response to the columns of a design, also when columns depend on each other.
 *
 * A column is dropped when, after those before it, less than `tolerance` of its length is left. Columns keep their order, so that
 * sequential sums of squares mean what the caller wrote.
 *
 * @param design n x p, n >= 1
 * @param response n values
 * @param tolerance part of a column's length below which it counts as dependent
 * @throws DomainError when sizes do not fit or an entry is not finite
 * @source Businger & Golub (1965); Golub & Van Loan, Matrix Computations, 5.3
 */
export function qrLeastSquares(design: Matrix, response: readonly number[], tolerance = 1e-10): LeastSquares {
  const rows = design.length;
  const width = design[0]?.length ?? 0;
  if (rows === 0) throw new DomainError("design", "no rows", "at least one row");
  if (response.length !== rows) throw new DomainError("response", `${response.length} values`, `${rows} values`);
  // columns as typed arrays: reflections run down columns
  const work = Array.from({ length: width }, (_, j) => Float64Array.from(design, (row) => row[j] ?? Number.NaN));
  const y = Float64Array.from(response);
  for (const column of [...work, y]) {
    for (const value of column)
      if (!Number.isFinite(value)) throw new DomainError("design", value, "finite entries in rows of equal length");
  }
  const reflections: Float64Array[] = [];
  const taken: number[] = [];
  for (let j = 0; j < width && taken.length < rows; j++) {
    const column = work[j]!;
    const whole = lengthFrom(column, 0);
    const start = taken.length;
    const rest = lengthFrom(column, start);
    if (!(rest > tolerance * whole)) continue;
    const reflection = column.slice(start);
    const sign = reflection[0]! < 0 ? -1 : 1;
    reflection[0]! += sign * rest;
    const size = lengthFrom(reflection, 0);
    for (let i = 0; i < reflection.length; i++) reflection[i]! /= size;
    for (let k = j; k < width; k++) reflect(reflection, work[k]!, start);
    reflect(reflection, y, start);
    reflections.push(reflection);
    taken.push(j);
  }
  const rank = taken.length;
  const triangle = taken.map((_, i) => taken.map((j, k) => (k < i ? 0 : work[j]![i]!)));
  const solution = new Array<number>(rank).fill(0);
  for (let i = rank - 1; i >= 0; i--) {
    let sum = y[i]!;
    for (let k = i + 1; k < rank; k++) sum -= triangle[i]![k]! * solution[k]!;
    solution[i] = sum / triangle[i]![i]!;
  }
  const coefficients = new Array<number>(width).fill(0);
  for (let i = 0; i < rank; i++) coefficients[taken[i]!] = solution[i]!;
  const effects = [...y];
  let residualSumOfSquares = 0;
  for (let i = rank; i < rows; i++) residualSumOfSquares += y[i]! * y[i]!;
  const residuals = y.slice();
  residuals.fill(0, 0, rank);
  for (let k = rank - 1; k >= 0; k--) reflect(reflections[k]!, residuals, k);
  return { coefficients, rank, columns: taken, residuals: [...residuals], residualSumOfSquares, effects, triangle };
}

function lengthFrom(column: Float64Array, start: number): number {
  let largest = 0;
  for (let i = start; i < column.length; i++) largest = Math.max(largest, Math.abs(column[i]!));
  if (largest === 0) return 0;
  let sum = 0;
  for (let i = start; i < column.length; i++) sum += (column[i]! / largest) ** 2;
  return largest * Math.sqrt(sum);
}

function reflect(unit: Float64Array, column: Float64Array, start: number): void {
  let product = 0;
  for (let i = 0; i < unit.length; i++) product += unit[i]! * column[start + i]!;
  product *= 2;
  for (let i = 0; i < unit.length; i++) column[start + i]! -= product * unit[i]!;
}
