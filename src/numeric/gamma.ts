/** The gamma and chi-square distributions. */
import {
  requireFiniteDegreesOfFreedom,
  requireNonNegative,
  requirePositive,
  requireProbability,
  requireShape,
} from "./argument-checks.ts";
import { gammaLower, gammaUpper, logGammaKernel, logGammaLower, logGammaUpper } from "./incomplete-gamma.ts";
import { logGammaOnePlus, logGammaUnchecked } from "./gamma-function.ts";
import { guardedStep } from "./monotone-root.ts";
import { normalQuantile, normalUpperQuantile } from "./normal.ts";

/**
 * x at which P(a, x) = lower, Q(a, x) = upper, for shape a and scale 1, without checks.
 * Halley's iteration on the log of the smaller tail as a function of log x, which is concave.
 * @param lower share below, 0 < lower < 1
 * @param upper 1 - lower, with its own digits
 */
export function standardGammaQuantile(lower: number, upper: number, a: number): number {
  const fromBelow = lower <= 0.5;
  const logTarget = Math.log(fromBelow ? lower : upper);
  // Wilson & Hilferty (1931) as the start; where it fails, the first term of the series
  const z = fromBelow ? normalQuantile(lower) : normalUpperQuantile(upper);
  const cubeRoot = 1 - 1 / (9 * a) + z / (3 * Math.sqrt(a));
  // log(x / a): near 0 for large shapes, where log x would round away digits of x
  let logRelative: number;
  if (fromBelow) {
    const firstTerm = (logTarget + (a <= 1 ? logGammaOnePlus(a) : logGammaUnchecked(a + 1))) / a;
    // so near 0 that only the first term x^a / Gamma(a + 1) is left, it is solved on paper
    if (firstTerm < -40) return Math.exp(firstTerm);
    logRelative = cubeRoot > 0.3 && a > 0.5 ? 3 * Math.log(cubeRoot) : Math.min(firstTerm - Math.log(a), 0);
  } else {
    logRelative = 3 * Math.log(Math.max(cubeRoot, 1));
  }
  let low = -Infinity;
  let high = Infinity;
  for (let iteration = 0; iteration < 200; iteration++) {
    const x = a * Math.exp(logRelative);
    const logKernel = logGammaKernel(a, x);
    const logTail = fromBelow ? logGammaLower(a, x) : logGammaUpper(a, x);
    const gap = logTail - logTarget;
    const hazard = Math.exp(logKernel - logTail);
    const newton = gap / hazard;
    const slope = a - x;
    const curvature = fromBelow
      ? 1 - (gap * (slope - hazard)) / (2 * hazard)
      : 1 + (gap * (slope + hazard)) / (2 * hazard);
    const size = curvature > 0.5 && curvature < 2 ? newton / curvature : newton;
    if (fromBelow === gap > 0) high = logRelative;
    else low = logRelative;
    const proposal = fromBelow ? logRelative - size : logRelative + size;
    const next = guardedStep(proposal, logRelative, low, high);
    const moved = Math.abs(next - logRelative);
    const converged = Math.abs(gap) < 1e-5 && next === proposal;
    logRelative = next;
    if (converged || moved <= 2e-16 * Math.abs(logRelative)) break;
  }
  return a * Math.exp(logRelative);
}

function checkArguments(x: number, shape: number, scale: number): void {
  requireNonNegative("x", x);
  requireShape("shape", shape);
  requirePositive("scale", scale);
}

/**
 * Upper tail of the gamma distribution, P(X >= x), computed directly.
 *
 * @param x >= 0, in the unit of `scale`
 * @param shape 0.0005 to 5e15
 * @param scale > 0; the mean is shape * scale
 * @returns probability in [0, 1]
 * @throws DomainError naming the argument outside its range
 * @source DLMF 8.2.4, 8.7.1, 8.9.2
 */
export function gammaUpperTail(x: number, shape: number, scale: number): number {
  checkArguments(x, shape, scale);
  return gammaUpper(shape, x / scale);
}

/** Lower tail of the gamma distribution, P(X <= x). See `gammaUpperTail`. */
export function gammaLowerTail(x: number, shape: number, scale: number): number {
  checkArguments(x, shape, scale);
  return gammaLower(shape, x / scale);
}

function quantile(lower: number, upper: number, shape: number): number {
  if (lower === 0) return 0;
  if (upper === 0) return Infinity;
  return standardGammaQuantile(lower, upper, shape);
}

/**
 * Lower quantile of the gamma distribution.
 *
 * @param p share below, 0 <= p <= 1
 * @param shape 0.0005 to 5e15
 * @param scale > 0
 * @throws DomainError naming the argument outside its range
 */
export function gammaQuantile(p: number, shape: number, scale: number): number {
  requireProbability("p", p);
  requireShape("shape", shape);
  requirePositive("scale", scale);
  return scale * quantile(p, 1 - p, shape);
}

/** Upper quantile of the gamma distribution: the value that a share p exceeds. See `gammaQuantile`. */
export function gammaUpperQuantile(p: number, shape: number, scale: number): number {
  requireProbability("p", p);
  requireShape("shape", shape);
  requirePositive("scale", scale);
  return scale * quantile(1 - p, p, shape);
}

/**
 * Upper tail of the chi-square distribution, P(X >= x), computed directly.
 *
 * @param x >= 0, Infinity allowed
 * @param df degrees of freedom, 0.001 to 1e16, fractions allowed
 * @returns probability in [0, 1]
 * @throws DomainError naming the argument outside its range
 * @source regularized incomplete gamma function Q(df / 2, x / 2), DLMF 8.2.4
 */
export function chiSquareUpperTail(x: number, df: number): number {
  requireNonNegative("x", x);
  requireFiniteDegreesOfFreedom("df", df);
  return gammaUpper(df / 2, x / 2);
}

/** Lower tail of the chi-square distribution, P(X <= x). See `chiSquareUpperTail`. */
export function chiSquareLowerTail(x: number, df: number): number {
  requireNonNegative("x", x);
  requireFiniteDegreesOfFreedom("df", df);
  return gammaLower(df / 2, x / 2);
}

/** Natural logarithm of the upper tail of chi-square, also where the tail itself underflows. See `chiSquareUpperTail`. */
export function chiSquareLogUpperTail(x: number, df: number): number {
  requireNonNegative("x", x);
  requireFiniteDegreesOfFreedom("df", df);
  return logGammaUpper(df / 2, x / 2);
}

/** Lower quantile of chi-square: the value below which a share p lies, 0 <= p <= 1. */
export function chiSquareQuantile(p: number, df: number): number {
  requireProbability("p", p);
  requireFiniteDegreesOfFreedom("df", df);
  return 2 * quantile(p, 1 - p, df / 2);
}

/** Upper quantile of chi-square: the critical value that a share p exceeds, 0 <= p <= 1. */
export function chiSquareUpperQuantile(p: number, df: number): number {
  requireProbability("p", p);
  requireFiniteDegreesOfFreedom("df", df);
  return 2 * quantile(1 - p, p, df / 2);
}
