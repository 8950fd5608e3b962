import { EigenvalueDecomposition, Matrix } from "ml-matrix";
import { fUpperTail } from "../../numeric/index.ts";
import { invertPositive, multiply, traceOfProduct } from "./block-algebra.ts";
import type { Pieces } from "./engine.ts";

/** A hypothesis on the fixed effects, tested. */
export interface FixedTest {
  /** F, already scaled where the method scales it. */
  readonly value: number;
  readonly df1: number;
  readonly df2: number;
  readonly p: number;
}

/** Everything about the estimates' precision that tests need, computed once per fit. */
export interface Precision {
  readonly columns: number;
  readonly beta: Float64Array;
  /** (X' V^-1 X)^-1. */
  readonly phi: Float64Array;
  /** The same, adjusted for the variances being estimated. */
  readonly adjusted: Float64Array;
  /** Covariance of the variance estimates: inverse of the expected information. */
  readonly spread: Float64Array;
  readonly pieces: Pieces;
}

/**
 * Covariance of the estimates adjusted for small samples.
 * @returns null where the information about the variances is singular
 * @source kenward-roger-1997 (Biometrics 53, 983-997), section 3; second derivatives vanish, since the covariance is linear in
 * its parameters
 */
export function precisionOf(pieces: Pieces, beta: Float64Array): Precision | null {
  const columns = beta.length;
  const r = pieces.p.length;
  const scale = Float64Array.from({ length: r }, (_, i) => 1 / Math.sqrt(pieces.information[i * r + i]!));
  const scaled = pieces.information.map((value, at) => value * scale[Math.floor(at / r)]! * scale[at % r]!);
  const inverted = scale.every(Number.isFinite) ? invertPositive(scaled, r, 1e-12) : null;
  if (inverted === null) return null;
  const spread = inverted.inverse.map((value, at) => value * scale[Math.floor(at / r)]! * scale[at % r]!);
  const size = columns * columns;
  const inner = new Float64Array(size);
  const half = new Float64Array(size);
  const whole = new Float64Array(size);
  for (let i = 0; i < r; i++) {
    multiply(pieces.p[i]!, pieces.phi, columns, half);
    for (let j = 0; j < r; j++) {
      multiply(half, pieces.p[j]!, columns, whole);
      const weight = spread[i * r + j]!;
      const q = j <= i ? pieces.q[i]![j]! : pieces.q[j]![i]!;
      for (let at = 0; at < size; at++) inner[at]! += weight * (q[at]! - whole[at]!);
    }
  }
  multiply(pieces.phi, inner, columns, half);
  multiply(half, pieces.phi, columns, whole);
  const adjusted = pieces.phi.map((value, at) => value + 2 * whole[at]!);
  return { columns, beta, phi: pieces.phi, adjusted, spread, pieces };
}

/** weights' matrix weights, df x df. */
export function sandwich(matrix: Float64Array, weights: Float64Array, columns: number, df: number): Float64Array {
  const half = new Float64Array(columns * df);
  for (let i = 0; i < columns; i++) {
    for (let k = 0; k < columns; k++) {
      const value = matrix[i * columns + k]!;
      if (value === 0) continue;
      for (let j = 0; j < df; j++) half[i * df + j]! += value * weights[k * df + j]!;
    }
  }
  const out = new Float64Array(df * df);
  for (let k = 0; k < columns; k++) {
    for (let i = 0; i < df; i++) {
      const value = weights[k * df + i]!;
      if (value === 0) continue;
      for (let j = 0; j < df; j++) out[i * df + j]! += value * half[k * df + j]!;
    }
  }
  return out;
}

function combined(beta: Float64Array, weights: Float64Array, df: number): Float64Array {
  const out = new Float64Array(df);
  for (let k = 0; k < beta.length; k++) for (let i = 0; i < df; i++) out[i]! += weights[k * df + i]! * beta[k]!;
  return out;
}

function waldF(beta: Float64Array, covariance: Float64Array, weights: Float64Array, df: number): number | null {
  const inverted = invertPositive(sandwich(covariance, weights, beta.length, df), df);
  if (inverted === null) return null;
  const estimates = combined(beta, weights, df);
  let value = 0;
  for (let i = 0; i < df; i++)
    for (let j = 0; j < df; j++) value += estimates[i]! * inverted.inverse[i * df + j]! * estimates[j]!;
  return value / df;
}

/**
 * Kenward and Roger's test: adjusted covariance, F scaled and df chosen to match the first two moments.
 *
 * @param weights columns x df, flat row-major, columns independent
 * @returns null where the moments that the method matches do not exist (hardly any information about the variances)
 * @source kenward-roger-1997 (Biometrics 53, 983-997)
 */
export function kenwardRogerTest(precision: Precision, weights: Float64Array, df: number): FixedTest | null {
  const { columns, phi, pieces, spread } = precision;
  const value = waldF(precision.beta, precision.adjusted, weights, df);
  const inverted = invertPositive(sandwich(phi, weights, columns, df), df);
  if (value === null || inverted === null) return null;
  const r = pieces.p.length;
  // Theta phi P_i phi, reduced to the df x df matrices (L' phi L)^-1 (L' phi P_i phi L), which have the same traces.
  const reduced = pieces.p.map((derivative) => {
    const half = new Float64Array(columns * columns);
    const whole = new Float64Array(columns * columns);
    multiply(phi, derivative, columns, half);
    multiply(half, phi, columns, whole);
    const out = new Float64Array(df * df);
    multiply(inverted.inverse, sandwich(whole, weights, columns, df), df, out);
    return out;
  });
  const trace = (matrix: Float64Array) => {
    let sum = 0;
    for (let i = 0; i < df; i++) sum += matrix[i * df + i]!;
    return sum;
  };
  let a1 = 0;
  let a2 = 0;
  for (let i = 0; i < r; i++) {
    for (let j = 0; j < r; j++) {
      a1 += spread[i * r + j]! * trace(reduced[i]!) * trace(reduced[j]!);
      a2 += spread[i * r + j]! * traceOfProduct(reduced[i]!, reduced[j]!, df);
    }
  }
  if (!(a2 > 0)) return null;
  if (df === 1) {
    // The general formulas come to scale 1 and df 2 / A2 exactly; said directly, they do not lose digits to cancellation.
    const df2 = 2 / a2;
    return { value, df1: 1, df2, p: fUpperTail(value, 1, df2) };
  }
  const b = (a1 + 6 * a2) / (2 * df);
  const g = ((df + 1) * a1 - (df + 4) * a2) / ((df + 2) * a2);
  const below = 3 * df + 2 * (1 - g);
  const c1 = g / below;
  const c2 = (df - g) / below;
  const c3 = (df + 2 - g) / below;
  const expectation = 1 / (1 - a2 / df);
  const variance = ((2 / df) * (1 + c1 * b)) / ((1 - c2 * b) ** 2 * (1 - c3 * b));
  const ratio = variance / (2 * expectation ** 2);
  const excess = df * ratio - 1;
  const df2 = excess > 0 ? 4 + (df + 2) / excess : Number.NaN;
  const scale = df2 / (expectation * (df2 - 2));
  if (!(expectation > 0 && 1 - c3 * b > 0 && df2 > 2 && scale > 0)) return null;
  return { value: scale * value, df1: df, df2, p: fUpperTail(scale * value, df, df2) };
}

/**
 * Satterthwaite's test with several df: the hypothesis is turned into independent single ones, whose df are put together.
 * @source satterthwaite-1946; fai-cornelius-1996 (J. Stat. Comput. Simul. 54, 363-378), their first method
 */
export function satterthwaiteTest(precision: Precision, weights: Float64Array, df: number): FixedTest | null {
  const { columns, phi, pieces, spread } = precision;
  const value = waldF(precision.beta, phi, weights, df);
  if (value === null) return null;
  const covariance = sandwich(phi, weights, columns, df);
  const matrix = new Matrix(
    Array.from({ length: df }, (_, i) =>
      Array.from({ length: df }, (__, j) => (covariance[i * df + j]! + covariance[j * df + i]!) / 2),
    ),
  );
  const decomposition = new EigenvalueDecomposition(matrix, { assumeSymmetric: true });
  const r = pieces.p.length;
  const derivatives = pieces.p.map((derivative) => {
    const half = new Float64Array(columns * columns);
    const whole = new Float64Array(columns * columns);
    multiply(phi, derivative, columns, half);
    multiply(half, phi, columns, whole);
    return sandwich(whole, weights, columns, df);
  });
  const single = decomposition.realEigenvalues.map((root, index) => {
    const vector = decomposition.eigenvectorMatrix.getColumn(index);
    const gradient = derivatives.map((derivative) => {
      let sum = 0;
      // d phi / d theta_i = -phi P_i phi, with P_i negative: only its square matters.
      for (let i = 0; i < df; i++)
        for (let j = 0; j < df; j++) sum += vector[i]! * derivative[i * df + j]! * vector[j]!;
      return sum;
    });
    let variance = 0;
    for (let i = 0; i < r; i++)
      for (let j = 0; j < r; j++) variance += gradient[i]! * spread[i * r + j]! * gradient[j]!;
    return (2 * root ** 2) / variance;
  });
  const sum = single.reduce((total, own) => (own > 2 ? total + own / (own - 2) : total), 0);
  const df2 = df === 1 ? single[0]! : (2 * sum) / (sum - df);
  if (!(df2 > 0)) return null;
  return { value, df1: df, df2, p: fUpperTail(value, df, df2) };
}
