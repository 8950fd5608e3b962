/** The distribution of the largest over the smallest of several independent sample variances (Hartley 1950). */
import { requireFiniteDegreesOfFreedom, requireProbability } from "./argument-checks.ts";
import { DomainError } from "./domain-error.ts";
import { logGammaKernel, logGammaUpper } from "./incomplete-gamma.ts";
import { breakpointsAround, integrateAdaptively } from "./kronrod-quadrature.ts";
import { increasingRoot } from "./monotone-root.ts";
import { normalQuantile, normalUpperQuantile } from "./normal.ts";

interface Shape {
  readonly variances: number;
  readonly df: number;
}

function checkShape({ variances, df }: Shape): void {
  if (!(Number.isInteger(variances) && variances >= 2))
    throw new DomainError("variances", variances, "a whole number >= 2");
  requireFiniteDegreesOfFreedom("df", df);
}

/**
 * One of the variances, u on the log scale, is the smallest; the others lie above it. The upper tail asks that not all of
 * them lie below ratio times it: A^m - (A - B)^m with A their tail at u, B at u + log ratio, m = variances - 1. The lower
 * tail asks that they do: (A - B)^m. Both are formed without a difference of nearly equal numbers.
 */
function integratedTail(ratio: number, { variances, df }: Shape, upper: boolean): number {
  const shape = df / 2;
  const others = variances - 1;
  const logIntegrand = (logX: number) => {
    const x = Math.exp(logX);
    const logDensity = logGammaKernel(shape, x);
    const logAbove = logGammaUpper(shape, x);
    const logBeyond = logGammaUpper(shape, ratio * x);
    if (logAbove === -Infinity || logDensity === -Infinity) return -Infinity;
    const logShare = logBeyond - logAbove;
    if (!upper) return logDensity + others * (logAbove + Math.log1p(-Math.exp(logShare)));
    // 1 - (1 - share)^m, m share where the share is so small that it might underflow
    const logAny =
      logShare < -40 ? Math.log(others) + logShare : Math.log(-Math.expm1(others * Math.log1p(-Math.exp(logShare))));
    return logDensity + others * logAbove + logAny;
  };
  const logMean = Math.log(shape);
  const width = 1 / Math.sqrt(shape);
  const peak = highest(logIntegrand, logMean - Math.log(ratio) - 3 * width - 5 / shape, logMean + 3 * width + 1);
  const unit = logIntegrand(peak);
  if (unit === -Infinity) return upper ? 0 : 1;
  const breakpoints = breakpointsAround(logIntegrand, peak, width / 2, unit - 41);
  const sum = integrateAdaptively((logX) => Math.exp(logIntegrand(logX) - unit), breakpoints, 1e-11);
  return Math.min(1, Math.exp(unit + Math.log(variances * sum)));
}

/** Place of the highest value of a function with one peak between low and high, by golden section, to about 1e-3. */
function highest(f: (u: number) => number, low: number, high: number): number {
  const golden = (Math.sqrt(5) - 1) / 2;
  let left = low;
  let right = high;
  let one = right - golden * (right - left);
  let other = left + golden * (right - left);
  let fOne = f(one);
  let fOther = f(other);
  while (right - left > 1e-3 * Math.min(1, high - low)) {
    if (fOne < fOther) {
      left = one;
      one = other;
      fOne = fOther;
      other = left + golden * (right - left);
      fOther = f(other);
    } else {
      right = other;
      other = one;
      fOther = fOne;
      one = right - golden * (right - left);
      fOne = f(one);
    }
  }
  return (left + right) / 2;
}

/** The two tails; the integral whose integrand loses nothing is taken for each. */
function maximumFRatioUpper(ratio: number, shape: Shape): number {
  if (ratio <= 1) return 1;
  if (ratio === Infinity) return 0;
  return integratedTail(ratio, shape, true);
}

function maximumFRatioLower(ratio: number, shape: Shape): number {
  if (ratio <= 1) return 0;
  if (ratio === Infinity) return 1;
  return integratedTail(ratio, shape, false);
}

/**
 * Upper tail of the maximum F ratio: the probability that the largest of `variances` sample variances is at least
 * `ratio` times the smallest, when all groups spread equally and are normal.
 *
 * @param ratio largest over smallest variance, >= 0; up to 1 the probability is 1
 * @param shape.variances number of groups, a whole number >= 2
 * @param shape.df degrees of freedom of each variance (group size less 1), 0.001 to 1e16
 * @returns probability in [0, 1]; measured accuracy: see the README of this room
 * @throws DomainError naming the argument outside its range
 * @source Hartley (1950), Biometrika 37, 308-312
 */
export function maximumFRatioUpperTail(ratio: number, shape: Shape): number {
  if (!(ratio >= 0)) throw new DomainError("ratio", ratio, ">= 0, Infinity allowed");
  checkShape(shape);
  return maximumFRatioUpper(ratio, shape);
}

/**
 * Critical value of the maximum F ratio: the ratio that a share p exceeds.
 *
 * @param p 0 <= p <= 1
 * @throws DomainError naming the argument outside its range
 */
export function maximumFRatioUpperQuantile(p: number, shape: Shape): number {
  requireProbability("p", p);
  checkShape(shape);
  if (p === 1) return 1;
  if (p === 0) return Infinity;
  // in the square root of the log ratio the normal score is nearly straight, from the middle into the tail
  const score = (root: number) => {
    const ratio = Math.exp(root * root);
    return p <= 0.5
      ? normalUpperQuantile(maximumFRatioUpper(ratio, shape)) - normalUpperQuantile(p)
      : normalQuantile(maximumFRatioLower(ratio, shape)) - normalQuantile(1 - p);
  };
  const root = increasingRoot(score, Math.min(3, Math.sqrt(3 / Math.sqrt(shape.df))), 0.25, 1e-8, 26);
  return Math.exp(root * root);
}
