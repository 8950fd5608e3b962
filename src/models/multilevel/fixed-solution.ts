import { invertPositive } from "./block-algebra.ts";

export interface FixedSolution {
  /** Minus the shift, length p. */
  readonly beta: Float64Array;
  /** p x p; within the constrained space where there is one. */
  readonly phi: Float64Array;
  readonly logDeterminant: number;
}

/** Fixed effects whose scaled cross-products leave less than this of their own length are taken as dependent. */
const dependence = 1e-13;

/**
 * Generalised least squares for the fixed effects from A = X' V^-1 X and b = X' V^-1 y.
 *
 * @param nullBasis p x p0 basis of the values that beta may take, or null for all
 * @param shift what was taken out of the responses beforehand; the constraint holds for beta with the shift put back
 * @returns null where the cross-products are singular to working precision
 */
export function solveFixed(
  a: Float64Array,
  b: Float64Array,
  p: number,
  nullBasis: Float64Array | null,
  shift: Float64Array,
): FixedSolution | null {
  if (nullBasis === null) {
    const inverted = inverse(a, p);
    if (inverted === null) return null;
    const beta = new Float64Array(p);
    for (let i = 0; i < p; i++) for (let j = 0; j < p; j++) beta[i]! += inverted.inverse[i * p + j]! * b[j]!;
    return { beta, phi: inverted.inverse, logDeterminant: inverted.logDeterminant };
  }
  const p0 = nullBasis.length / p;
  const half = new Float64Array(p * p0);
  for (let i = 0; i < p; i++) {
    for (let k = 0; k < p; k++) {
      const value = a[i * p + k]!;
      for (let j = 0; j < p0; j++) half[i * p0 + j]! += value * nullBasis[k * p0 + j]!;
    }
  }
  const inner = new Float64Array(p0 * p0);
  for (let k = 0; k < p; k++) {
    for (let i = 0; i < p0; i++) {
      const value = nullBasis[k * p0 + i]!;
      for (let j = 0; j < p0; j++) inner[i * p0 + j]! += value * half[k * p0 + j]!;
    }
  }
  // N'(b + A shift): the responses with the shift put back.
  const right = new Float64Array(p0);
  for (let k = 0; k < p; k++) {
    let value = b[k]!;
    for (let j = 0; j < p; j++) value += a[k * p + j]! * shift[j]!;
    for (let i = 0; i < p0; i++) right[i]! += nullBasis[k * p0 + i]! * value;
  }
  const inverted = inverse(inner, p0);
  if (inverted === null) return null;
  const gamma = new Float64Array(p0);
  for (let i = 0; i < p0; i++) for (let j = 0; j < p0; j++) gamma[i]! += inverted.inverse[i * p0 + j]! * right[j]!;
  const beta = new Float64Array(p);
  const phi = new Float64Array(p * p);
  for (let k = 0; k < p; k++) {
    for (let i = 0; i < p0; i++) {
      const value = nullBasis[k * p0 + i]!;
      beta[k]! += value * gamma[i]!;
      for (let l = 0; l < p; l++) {
        let inside = 0;
        for (let j = 0; j < p0; j++) inside += inverted.inverse[i * p0 + j]! * nullBasis[l * p0 + j]!;
        phi[k * p + l]! += value * inside;
      }
    }
    beta[k]! -= shift[k]!;
  }
  return { beta, phi, logDeterminant: inverted.logDeterminant };
}

/** Inverse after scaling to a unit diagonal, so that a covariate's unit decides nothing. */
function inverse(matrix: Float64Array, size: number): { inverse: Float64Array; logDeterminant: number } | null {
  const scale = Float64Array.from({ length: size }, (_, i) => 1 / Math.sqrt(matrix[i * size + i]!));
  const scaled = matrix.map((value, at) => value * scale[Math.floor(at / size)]! * scale[at % size]!);
  const inverted = scale.every(Number.isFinite) ? invertPositive(scaled, size, dependence) : null;
  if (inverted === null) return null;
  let logDeterminant = inverted.logDeterminant;
  for (const value of scale) logDeterminant -= 2 * Math.log(value);
  return {
    inverse: inverted.inverse.map((value, at) => value * scale[Math.floor(at / size)]! * scale[at % size]!),
    logDeterminant,
  };
}
