/** The noncentral chi-square distribution: the sum of squares of normal variables whose means are not all zero. */
import {
  requireNonNegative,
  requireNonNegativeFinite,
  requireFiniteDegreesOfFreedom,
  requireProbability,
} from "./argument-checks.ts";
import { gammaLower, gammaUpper, logGammaKernel, logGammaLower, logGammaUpper } from "./incomplete-gamma.ts";
import { increasingRoot } from "./monotone-root.ts";
import { normalQuantile, normalUpperQuantile } from "./normal.ts";
import { type MixtureMembers, mixtureLowerTail, mixtureUpperTail } from "./poisson-mixture.ts";

/** Below this a noncentrality changes no digit of a tail above 1e-280, and its Poisson weights would underflow. */
export const negligibleNoncentrality = 1e-290;

function membersAt(x: number, shape: number): MixtureMembers {
  return {
    logLower: (j) => logGammaLower(shape + j, x),
    logUpper: (j) => logGammaUpper(shape + j, x),
    logDifference: (j) => logGammaKernel(shape + j, x) - Math.log(shape + j),
    differenceRatio: (j) => x / (shape + j + 1),
  };
}

/** Whether the upper tail is the smaller one, roughly: the point lies above the mean. */
function isAboveMean(x: number, df: number, noncentrality: number): boolean {
  return x > df + noncentrality;
}

/** Lower tail without checks. */
export function noncentralChiSquareLower(x: number, df: number, noncentrality: number): number {
  if (x === 0) return 0;
  if (x === Infinity) return 1;
  if (noncentrality < negligibleNoncentrality) return gammaLower(df / 2, x / 2);
  const members = membersAt(x / 2, df / 2);
  return isAboveMean(x, df, noncentrality)
    ? 1 - mixtureUpperTail(members, noncentrality / 2)
    : mixtureLowerTail(members, noncentrality / 2);
}

/** Upper tail without checks. */
export function noncentralChiSquareUpper(x: number, df: number, noncentrality: number): number {
  if (x === 0) return 1;
  if (x === Infinity) return 0;
  if (noncentrality < negligibleNoncentrality) return gammaUpper(df / 2, x / 2);
  const members = membersAt(x / 2, df / 2);
  return isAboveMean(x, df, noncentrality)
    ? mixtureUpperTail(members, noncentrality / 2)
    : 1 - mixtureLowerTail(members, noncentrality / 2);
}

function checkShape(df: number, noncentrality: number): void {
  requireFiniteDegreesOfFreedom("df", df);
  requireNonNegativeFinite("noncentrality", noncentrality);
}

/**
 * Lower tail of the noncentral chi-square distribution, P(X <= x), computed directly.
 *
 * @param x >= 0, Infinity allowed
 * @param df degrees of freedom, 0.001 to 1e16, fractions allowed
 * @param noncentrality sum of squared means in units of the standard deviation, >= 0 and finite
 * @returns probability in [0, 1]; measured accuracy: see the README of this room
 * @throws DomainError naming the argument outside its range
 * @source Poisson mixture, Fisher (1928); summed around its largest term with positive terms only
 */
export function noncentralChiSquareLowerTail(x: number, df: number, noncentrality: number): number {
  requireNonNegative("x", x);
  checkShape(df, noncentrality);
  return noncentralChiSquareLower(x, df, noncentrality);
}

/** Upper tail of the noncentral chi-square distribution, P(X >= x), computed directly. See `noncentralChiSquareLowerTail`. */
export function noncentralChiSquareUpperTail(x: number, df: number, noncentrality: number): number {
  requireNonNegative("x", x);
  checkShape(df, noncentrality);
  return noncentralChiSquareUpper(x, df, noncentrality);
}

/**
 * Lower quantile of the noncentral chi-square distribution: the value below which a share p lies.
 *
 * @param p 0 <= p <= 1
 * @param df degrees of freedom, 0.001 to 1e16
 * @param noncentrality >= 0 and finite
 * @throws DomainError naming the argument outside its range
 */
export function noncentralChiSquareQuantile(p: number, df: number, noncentrality: number): number {
  requireProbability("p", p);
  checkShape(df, noncentrality);
  if (p === 0) return 0;
  if (p === 1) return Infinity;
  const target = normalQuantile(p);
  // seen as a normal score the tail is nearly a straight line in log x, which a root finder likes
  const score = (logX: number) => {
    const x = Math.exp(logX);
    const z = isAboveMean(x, df, noncentrality)
      ? normalUpperQuantile(noncentralChiSquareUpper(x, df, noncentrality))
      : normalQuantile(noncentralChiSquareLower(x, df, noncentrality));
    return z - target;
  };
  const mean = df + noncentrality;
  const spread = Math.sqrt(2 * (mean + noncentrality)) / mean;
  const start = Math.log(mean) + Math.max(-3, Math.min(3, target * Math.min(1, spread)));
  return Math.exp(increasingRoot(score, start, 0.2 * Math.min(1, spread), -745, 709));
}
