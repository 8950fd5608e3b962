/** Student's t distribution. */
import { areUnlimited, requireDegreesOfFreedom, requireNumber, requireProbability } from "./argument-checks.ts";
import { logRatioUpperQuantile, logRatioUpperTail, ratioUpperTail } from "./f.ts";
import { logBeta } from "./gamma-function.ts";
import { normalLogUpperTail, normalQuantile, normalUpperTail } from "./normal.ts";

/** Beyond this |t| its square could overflow; only the first term of the tail is left there, to the last digit. */
const overflowGuard = 1e120;

/** log P(|T| >= size) for a size whose square may overflow: x^a / (a B(a, 1/2)) with x = df / t^2, a = df / 2. */
function logFarTwoSidedTail(size: number, df: number): number {
  const a = df / 2;
  return a * (Math.log(df) - 2 * Math.log(size)) - Math.log(a) - logBeta(a, 0.5);
}

/** P(|T| >= size), size >= 0. */
function twoSidedTail(size: number, df: number): number {
  if (areUnlimited(df)) return 2 * normalUpperTail(size);
  if (size > overflowGuard) return size === Infinity ? 0 : Math.exp(logFarTwoSidedTail(size, df));
  return ratioUpperTail(size * size, 0.5, df / 2);
}

function checkArguments(t: number, df: number): void {
  requireNumber("t", t);
  requireDegreesOfFreedom("df", df);
}

/**
 * Upper tail of Student's t distribution, P(T >= t), computed directly.
 *
 * @param t any number, also +-Infinity
 * @param df degrees of freedom, >= 0.001, fractions allowed; Infinity gives the normal distribution
 * @returns probability in [0, 1]; measured accuracy: see the README of this room
 * @throws DomainError naming the argument, its value and the allowed range
 * @source half of I_x(df/2, 1/2) at x = df / (df + t^2), DLMF 8.17
 */
export function tUpperTail(t: number, df: number): number {
  checkArguments(t, df);
  return t >= 0 ? 0.5 * twoSidedTail(t, df) : 1 - 0.5 * twoSidedTail(-t, df);
}

/** Lower tail of Student's t, P(T <= t), computed directly. See `tUpperTail`. */
export function tLowerTail(t: number, df: number): number {
  checkArguments(t, df);
  return t <= 0 ? 0.5 * twoSidedTail(-t, df) : 1 - 0.5 * twoSidedTail(t, df);
}

/** Two-sided tail of Student's t, P(|T| >= |t|). See `tUpperTail`. */
export function tTwoSidedTail(t: number, df: number): number {
  checkArguments(t, df);
  return twoSidedTail(Math.abs(t), df);
}

/** Natural logarithm of the upper tail of Student's t, also where the tail itself underflows. See `tUpperTail`. */
export function tLogUpperTail(t: number, df: number): number {
  checkArguments(t, df);
  if (areUnlimited(df)) return normalLogUpperTail(t);
  if (t < 0) return Math.log1p(-0.5 * twoSidedTail(-t, df));
  if (t > overflowGuard) return t === Infinity ? -Infinity : logFarTwoSidedTail(t, df) - Math.LN2;
  return logRatioUpperTail(t * t, 0.5, df / 2) - Math.LN2;
}

/**
 * Lower quantile of Student's t: the value below which a share p lies.
 *
 * @param p 0 <= p <= 1; 0 and 1 give -Infinity and Infinity
 * @param df degrees of freedom, >= 0.001, fractions allowed, Infinity allowed
 * @throws DomainError naming the argument, its value and the allowed range
 * @source t^2 is an F ratio with 1 and df degrees of freedom
 */
export function tQuantile(p: number, df: number): number {
  requireProbability("p", p);
  requireDegreesOfFreedom("df", df);
  if (areUnlimited(df)) return normalQuantile(p);
  if (p === 0.5) return 0;
  if (p === 0) return -Infinity;
  if (p === 1) return Infinity;
  const tail = p < 0.5 ? p : 1 - p;
  const size = Math.exp(0.5 * logRatioUpperQuantile(2 * tail, 1 - 2 * tail, 0.5, df / 2));
  return p < 0.5 ? -size : size;
}

/** Upper quantile of Student's t: the critical value that a share p exceeds; p keeps its digits. See `tQuantile`. */
export function tUpperQuantile(p: number, df: number): number {
  return 0 - tQuantile(p, df);
}
