/** Dense matrices as flat row-major Float64Array, written into buffers that are used again: the inner loops of the fit. */

/**
 * Cholesky factor of a symmetric positive definite matrix, in place (lower triangle; the upper is left as it was).
 * @param tolerance smallest share of a diagonal entry that may be left as its pivot
 * @returns log determinant, or NaN where a pivot is not positive to that tolerance
 */
export function choleskyInPlace(matrix: Float64Array, size: number, tolerance = 1e-14): number {
  let logDeterminant = 0;
  for (let column = 0; column < size; column++) {
    const columnRow = column * size;
    const original = matrix[columnRow + column]!;
    let pivot = original;
    for (let k = 0; k < column; k++) pivot -= matrix[columnRow + k]! * matrix[columnRow + k]!;
    if (!(pivot > tolerance * original)) return Number.NaN;
    const root = Math.sqrt(pivot);
    logDeterminant += Math.log(pivot);
    matrix[columnRow + column] = root;
    const inverse = 1 / root;
    for (let row = column + 1; row < size; row++) {
      const rowStart = row * size;
      let value = matrix[rowStart + column]!;
      for (let k = 0; k < column; k++) value -= matrix[rowStart + k]! * matrix[columnRow + k]!;
      matrix[rowStart + column] = value * inverse;
    }
  }
  return logDeterminant;
}

/**
 * Inverse from a lower Cholesky factor, both triangles.
 * @param scratch size x size, neither `factor` nor `out`
 */
export function inverseFromFactor(factor: Float64Array, size: number, out: Float64Array, scratch: Float64Array): void {
  // Rows of the factor's own inverse; every inner loop runs along a row, which matters for large systems.
  for (let row = 0; row < size; row++) {
    const start = row * size;
    scratch.fill(0, start, start + size);
    for (let k = 0; k < row; k++) {
      const value = factor[start + k]!;
      if (value === 0) continue;
      const other = k * size;
      for (let j = 0; j <= k; j++) scratch[start + j]! -= value * scratch[other + j]!;
    }
    const pivot = 1 / factor[start + row]!;
    for (let j = 0; j < row; j++) scratch[start + j]! *= pivot;
    scratch[start + row] = pivot;
  }
  out.fill(0, 0, size * size);
  for (let k = 0; k < size; k++) {
    const from = k * size;
    for (let i = 0; i <= k; i++) {
      const value = scratch[from + i]!;
      if (value === 0) continue;
      const to = i * size;
      for (let j = 0; j <= i; j++) out[to + j]! += value * scratch[from + j]!;
    }
  }
  for (let i = 0; i < size; i++) for (let j = 0; j < i; j++) out[j * size + i] = out[i * size + j]!;
}

/** Solves (L L') x = b in place for one right-hand side. */
export function solveFromFactor(factor: Float64Array, size: number, vector: Float64Array): void {
  for (let row = 0; row < size; row++) {
    let value = vector[row]!;
    for (let k = 0; k < row; k++) value -= factor[row * size + k]! * vector[k]!;
    vector[row] = value / factor[row * size + row]!;
  }
  for (let row = size - 1; row >= 0; row--) {
    let value = vector[row]!;
    for (let k = row + 1; k < size; k++) value -= factor[k * size + row]! * vector[k]!;
    vector[row] = value / factor[row * size + row]!;
  }
}

/** out = left right, all size x size. */
export function multiply(left: Float64Array, right: Float64Array, size: number, out: Float64Array): void {
  out.fill(0, 0, size * size);
  for (let i = 0; i < size; i++) {
    for (let k = 0; k < size; k++) {
      const value = left[i * size + k]!;
      if (value === 0) continue;
      const from = k * size;
      const to = i * size;
      for (let j = 0; j < size; j++) out[to + j]! += value * right[from + j]!;
    }
  }
}

/** Sum over all entries of left[i, j] right[j, i]: trace of the product. */
export function traceOfProduct(left: Float64Array, right: Float64Array, size: number): number {
  let sum = 0;
  for (let i = 0; i < size; i++) {
    for (let j = 0; j < size; j++) sum += left[i * size + j]! * right[j * size + i]!;
  }
  return sum;
}

/** Inverse and log determinant of a symmetric positive definite matrix; null where it is not. */
export function invertPositive(
  matrix: Float64Array,
  size: number,
  tolerance = 1e-14,
): { inverse: Float64Array; logDeterminant: number } | null {
  const factor = Float64Array.from(matrix);
  const logDeterminant = choleskyInPlace(factor, size, tolerance);
  if (Number.isNaN(logDeterminant)) return null;
  const inverse = new Float64Array(size * size);
  inverseFromFactor(factor, size, inverse, new Float64Array(size * size));
  return { inverse, logDeterminant };
}
