/** The noncentral t distribution: a standardised difference when the true difference is not zero. */
import {
  areUnlimited,
  requireDegreesOfFreedom,
  requireFinite,
  requireNumber,
  requireOpenProbability,
  requireProbability,
} from "./argument-checks.ts";
import { halfLogTwoPi, logOnePlusMinus, stirlingError } from "./gamma-function.ts";
import { breakpointsAround, integrateAdaptively } from "./kronrod-quadrature.ts";
import { increasingRoot } from "./monotone-root.ts";
import { ratioMembers } from "./noncentral-f.ts";
import { millsRatio, normalLogUpperTail, normalQuantile, normalUpperQuantile, normalUpperTail } from "./normal.ts";
import { plainLowerSum, plainUpperSum } from "./poisson-mixture.ts";
import { tQuantile, tUpperTail } from "./t.ts";

/** Parts of the integrand below exp(-41) of its peak are left out. */
const negligible = 41;

/** phi(z) / Q(z), the hazard of the normal distribution. */
function hazard(z: number): number {
  if (z >= 0) return 1 / millsRatio(z);
  return z < -38 ? 0 : Math.exp(-0.5 * z * z - halfLogTwoPi) / normalUpperTail(z);
}

/**
 * The integral over u = log s, with s the ratio of estimated to true standard deviation, of the density of u times
 * Q(sign (size s - shift)): upper tail (sign 1) or lower tail (sign -1) of T at size > 0. No part is negative, so both
 * tails keep their digits; nothing alternates, whatever the signs of t and of the noncentrality.
 */
function integratedTail(size: number, df: number, shift: number, sign: 1 | -1): number {
  // log density of u: constant + df (u - (exp(2u) - 1) / 2)
  const constant = Math.LN2 + 0.5 * Math.log(df / 2) - halfLogTwoPi - stirlingError(df / 2);
  const atOne = size - shift;
  // size e^u - shift around u = 0, where shift and size may nearly cancel
  const score = (u: number) => sign * (u > -0.7 && u < 0.7 ? size * Math.expm1(u) + atOne : size * Math.exp(u) - shift);
  const logWeight = (u: number) => {
    const e = Math.expm1(2 * u);
    return 0.5 * df * (e > -0.3 && e < 0.4 ? logOnePlusMinus(e) : 2 * u - e);
  };
  const logIntegrand = (u: number) => logWeight(u) + normalLogUpperTail(score(u));
  const slope = (u: number) => -df * Math.expm1(2 * u) - sign * size * Math.exp(u) * hazard(score(u));

  const mode = peak(slope, sign);
  const unit = logIntegrand(mode);
  if (unit < -800) return 0; // below the smallest double
  const floor = unit - negligible;
  const reach = size * Math.exp(mode);
  const width = 1 / Math.sqrt(2 * df + Math.min(reach * reach, 1e12));
  const breakpoints = breakpointsAround(logIntegrand, mode, width, floor);
  const left = breakpoints[0]!;
  const right = breakpoints[breakpoints.length - 1]!;
  const integrand = (u: number) => {
    const z = score(u);
    const weight = logWeight(u) - unit;
    // beyond 0 density and Mills' ratio apart, so that far tails neither underflow nor need a logarithm
    return z > 0
      ? Math.exp(weight - 0.5 * z * z - halfLogTwoPi) * millsRatio(z)
      : Math.exp(weight) * normalUpperTail(z);
  };
  // where the normal tail turns from 0 to 1 the integrand bends, on the scale 1 / shift of u
  if (shift > 0) {
    const bend = Math.log(shift / size);
    for (const units of [-30, -8, 0, 8, 30]) {
      const u = bend + units / shift;
      if (u > left && u < right) breakpoints.push(u);
    }
  }
  breakpoints.sort((one, other) => one - other);
  return Math.min(1, Math.exp(constant + unit + Math.log(integrateAdaptively(integrand, breakpoints, 1e-11))));
}

/**
 * P(T >= t) as a sum of incomplete beta functions, for t and noncentrality of the same sign, where all terms are positive,
 * and not too many; null elsewhere. Ten times as fast as the integral, which holds everywhere.
 * @source Guenther (1978), Journal of Statistical Computation and Simulation 6, 199-206 (recalled): even and odd powers of
 *   the noncentrality apart
 */
function summedTail(t: number, df: number, noncentrality: number): number | null {
  const square = t * t;
  if (!(t > 0 === noncentrality > 0) || square < 1e-8 || square > 1e10 || df > 1e6 || df < 0.1) return null;
  const mean = (noncentrality * noncentrality) / 2;
  if (mean < 1e-8) return null;
  const even = ratioMembers(square, 0.5, df / 2);
  const odd = ratioMembers(square / 2, 1, df / 2);
  if (t > 0) {
    const evenSum = plainUpperSum(even, mean, 0);
    const oddSum = evenSum === null ? null : plainUpperSum(odd, mean, 0.5);
    return evenSum === null || oddSum === null ? null : Math.min(1, 0.5 * (evenSum + oddSum));
  }
  const evenSum = plainLowerSum(even, mean, 0);
  const oddSum = evenSum === null ? null : plainLowerSum(odd, mean, 0.5);
  if (evenSum === null || oddSum === null) return null;
  return Math.min(1, normalUpperTail(-noncentrality) + 0.5 * (evenSum + oddSum));
}

/** Where the slope of the log integrand changes sign; sign 1: at or below u = 0, sign -1: at or above. */
function peak(slope: (u: number) => number, sign: 1 | -1): number {
  let near = 0;
  let stride = sign === 1 ? -0.25 : 0.25;
  let far = stride;
  while (slope(far) * sign < 0 && Math.abs(far) < 700) {
    near = far;
    stride *= 2;
    far += stride;
  }
  for (let i = 0; i < 30 && Math.abs(far - near) > 1e-9; i++) {
    const middle = (near + far) / 2;
    if (slope(middle) * sign < 0) near = middle;
    else far = middle;
  }
  return (near + far) / 2;
}

/** P(T >= t) without checks; df > 0. */
function upperTail(t: number, df: number, noncentrality: number): number {
  if (t === Infinity) return 0;
  if (t === -Infinity) return 1;
  if (noncentrality === 0) return tUpperTail(t, df);
  if (areUnlimited(df)) return normalUpperTail(t - noncentrality);
  if (t === 0) return normalUpperTail(-noncentrality);
  const summed = summedTail(t, df, noncentrality);
  if (summed !== null) return summed;
  return t > 0 ? integratedTail(t, df, noncentrality, 1) : integratedTail(-t, df, -noncentrality, -1);
}

/** P(T <= t) without checks, the mirror image. */
function lowerTail(t: number, df: number, noncentrality: number): number {
  return upperTail(-t, df, -noncentrality);
}

/** Normal score of the upper tail, from the tail that has its digits. */
function upperScore(t: number, df: number, noncentrality: number): number {
  return t > noncentrality
    ? normalQuantile(upperTail(t, df, noncentrality))
    : normalUpperQuantile(lowerTail(t, df, noncentrality));
}

function checkArguments(t: number, df: number, noncentrality: number): void {
  requireNumber("t", t);
  requireDegreesOfFreedom("df", df);
  requireFinite("noncentrality", noncentrality);
}

/**
 * Lower tail of the noncentral t distribution, P(T <= t), computed directly.
 *
 * @param t any number, also +-Infinity
 * @param df degrees of freedom, >= 0.001, fractions allowed; Infinity gives the normal distribution
 * @param noncentrality true difference over its standard error, any finite number
 * @returns probability in [0, 1]; measured accuracy: see the README of this room
 * @throws DomainError naming the argument outside its range
 * @source the definition, T = (Z + noncentrality) / s, integrated over log s by adaptive Gauss-Kronrod quadrature; where few
 *   positive terms suffice, the sum of incomplete beta functions after Guenther (1978)
 */
export function noncentralTLowerTail(t: number, df: number, noncentrality: number): number {
  checkArguments(t, df, noncentrality);
  return lowerTail(t, df, noncentrality);
}

/** Upper tail of the noncentral t distribution, P(T >= t): the power of a one-sided t test with critical value t. See `noncentralTLowerTail`. */
export function noncentralTUpperTail(t: number, df: number, noncentrality: number): number {
  checkArguments(t, df, noncentrality);
  return upperTail(t, df, noncentrality);
}

/**
 * Lower quantile of the noncentral t distribution: the value below which a share p lies.
 *
 * @param p 0 <= p <= 1
 * @throws DomainError naming the argument outside its range
 */
export function noncentralTQuantile(p: number, df: number, noncentrality: number): number {
  requireProbability("p", p);
  checkArguments(0, df, noncentrality);
  if (p === 0) return -Infinity;
  if (p === 1) return Infinity;
  if (noncentrality === 0) return tQuantile(p, df);
  if (areUnlimited(df)) return normalQuantile(p) + noncentrality;
  const target = normalQuantile(p);
  // t itself may be astronomical for few degrees of freedom: its inverse hyperbolic sine is not
  const score = (a: number) => -target - upperScore(Math.sinh(a), df, noncentrality);
  const spread = Math.sqrt(1 + (noncentrality * noncentrality) / (2 * df));
  const start = Math.asinh(noncentrality + target * spread);
  return Math.sinh(increasingRoot(score, start, 0.1, -700, 700));
}

/**
 * The noncentrality at which a t at least as large as the observed one has a given probability: the limits of an
 * interval for the noncentrality (probability alpha / 2 gives the lower, 1 - alpha / 2 the upper limit).
 *
 * @param question.t observed t, finite
 * @param question.df degrees of freedom, >= 0.001, Infinity allowed
 * @param question.probability wanted upper tail at the observed t, 0 < p < 1
 * @returns noncentrality, any sign
 * @throws DomainError naming the argument outside its range
 * @source inversion of the test, Steiger & Fouladi (1997)
 */
export function noncentralityForT(question: {
  readonly t: number;
  readonly df: number;
  readonly probability: number;
}): number {
  const { t, df, probability } = question;
  requireFinite("t", t);
  requireDegreesOfFreedom("df", df);
  requireOpenProbability("probability", probability);
  const target = normalQuantile(probability);
  if (areUnlimited(df) || t === 0) return t + target;
  const spread = Math.sqrt(1 + (t * t) / (2 * df));
  const score = (noncentrality: number) => upperScore(t, df, noncentrality) - target;
  return increasingRoot(score, t + target * spread, 0.1 * spread);
}
