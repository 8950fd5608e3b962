/** The test of normality by Shapiro and Wilk, after Royston. */
import { requireFinite } from "./argument-checks.ts";
import { DomainError } from "./domain-error.ts";
import { normalQuantile, normalUpperTail } from "./normal.ts";

/** Royston (1995), AS R94: polynomials in 1/sqrt(n) for the two outermost weights, ascending powers. */
const outermostWeight = [0, 0.221157, -0.147981, -2.07119, 4.434685, -2.706056];
const secondWeight = [0, 0.042981, -0.293762, -1.752461, 5.682633, -3.582633];
/** AS R94, n <= 11: shift of the transformation, mean and log standard deviation as polynomials in n. */
const smallShift = [-2.273, 0.459];
const smallMean = [0.544, -0.39978, 0.025054, -6.714e-4];
const smallLogSpread = [1.3822, -0.77857, 0.062767, -0.0020322];
/** AS R94, n >= 12: mean and log standard deviation of log(1 - W) as polynomials in log n. */
const largeMean = [-1.5861, -0.31082, -0.083751, 0.0038915];
const largeLogSpread = [-0.4803, -0.082676, 0.0030302];

function polynomial(coefficients: readonly number[], x: number): number {
  let sum = 0;
  for (let i = coefficients.length - 1; i >= 0; i--) sum = sum * x + coefficients[i]!;
  return sum;
}

/** Weights of the upper half of the ordered values, largest first; the lower half has the same with the other sign. */
function weights(n: number): number[] {
  const half = Math.floor(n / 2);
  if (n === 3) return [Math.SQRT1_2];
  // Blom's approximate normal scores, largest first
  const scores = Array.from({ length: half }, (_, i) => -normalQuantile((i + 1 - 0.375) / (n + 0.25)));
  let squares = 0;
  for (const score of scores) squares += 2 * score * score;
  const inverseRoot = 1 / Math.sqrt(n);
  const norm = Math.sqrt(squares);
  const first = polynomial(outermostWeight, inverseRoot) + scores[0]! / norm;
  const kept = n > 5 ? 2 : 1;
  const result = [first];
  let remaining = squares - 2 * scores[0]! ** 2;
  let share = 1 - 2 * first * first;
  if (kept === 2) {
    const second = polynomial(secondWeight, inverseRoot) + scores[1]! / norm;
    result.push(second);
    remaining -= 2 * scores[1]! ** 2;
    share -= 2 * second * second;
  }
  const scale = Math.sqrt(share / remaining);
  for (let i = kept; i < half; i++) result.push(scores[i]! * scale);
  return result;
}

/** p of W for n values. `oneMinusW` carries its own digits, since W is often near 1. */
function tailOfW(oneMinusW: number, n: number): number {
  if (n === 3) {
    // exact: p = 6/pi (asin sqrt W - asin sqrt(3/4)), W from 3/4 to 1
    const p = 1 - (6 / Math.PI) * Math.asin(Math.sqrt(Math.min(1, oneMinusW)));
    return Math.min(1, Math.max(0, p));
  }
  let y = Math.log(oneMinusW);
  let mean: number;
  let spread: number;
  if (n <= 11) {
    const shift = polynomial(smallShift, n);
    // W below what the transformation knows: as far from normal as can be
    if (y >= shift) return 0;
    y = -Math.log(shift - y);
    mean = polynomial(smallMean, n);
    spread = Math.exp(polynomial(smallLogSpread, n));
  } else {
    const logN = Math.log(n);
    mean = polynomial(largeMean, logN);
    spread = Math.exp(polynomial(largeLogSpread, logN));
  }
  return normalUpperTail((y - mean) / spread);
}

/**
 * Shapiro-Wilk test of normality: W, near 1 for normal values, and the probability of a W as small when they are normal.
 *
 * @param values 3 to 5000 finite numbers in any order, not all equal; the array is not changed
 * @returns `w` in (0, 1], `p` in [0, 1]; p is Royston's approximation (exact for three values)
 * @throws DomainError for too few or too many values, a value that is not finite, or values that are all equal
 * @source Shapiro & Wilk (1965); Royston (1995), Applied Statistics 44, 547-551 (AS R94)
 */
export function shapiroWilk(values: readonly number[]): { readonly w: number; readonly p: number } {
  const n = values.length;
  if (n < 3 || n > 5000) throw new DomainError("number of values", n, "3 to 5000");
  for (const value of values) requireFinite("value", value);
  const sorted = Float64Array.from(values).sort();
  const lowest = sorted[0]!;
  const range = sorted[n - 1]! - lowest;
  if (!(range > 0)) throw new DomainError("values", lowest, "not all equal");
  if (range === Infinity) throw new DomainError("range of the values", range, "finite");

  // scaled to the range: W does not change, and nothing overflows or underflows
  const scaled = sorted.map((value) => (value - lowest) / range);
  let sum = 0;
  for (const value of scaled) sum += value;
  const mean = sum / n;
  const half = Math.floor(n / 2);
  const upperHalf = weights(n);
  let squares = 0;
  let weightedSum = 0;
  let weightSquares = 0;
  for (let i = 0; i < n; i++) squares += (scaled[i]! - mean) ** 2;
  for (let i = 0; i < half; i++) {
    weightedSum += upperHalf[i]! * (scaled[n - 1 - i]! - scaled[i]!);
    weightSquares += 2 * upperHalf[i]! ** 2;
  }
  // 1 - W as a product: W is the squared correlation, near 1 where it matters
  const normed = Math.sqrt(weightSquares * squares);
  const oneMinusW = Math.max(0, ((normed - weightedSum) * (normed + weightedSum)) / (weightSquares * squares));
  return { w: 1 - oneMinusW, p: tailOfW(oneMinusW, n) };
}
