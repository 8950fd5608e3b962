/** The beta distribution. */
import { requireShape, requireProbability, requireUnitInterval } from "./argument-checks.ts";
import { logRatioUpperQuantile } from "./f.ts";
import { incompleteBeta, logIncompleteBeta } from "./incomplete-beta.ts";

function checkArguments(x: number, a: number, b: number): void {
  requireUnitInterval("x", x);
  requireShape("a", a);
  requireShape("b", b);
}

/** a - (a + b) x, from the side on which the difference loses nothing. */
function excessAt(x: number, a: number, b: number): number {
  return x < 0.5 ? a - (a + b) * x : (a + b) * (1 - x) - b;
}

/**
 * Lower tail of the beta distribution, P(X <= x): the regularized incomplete beta function I_x(a, b).
 *
 * @param x 0 <= x <= 1
 * @param a first shape, 0.0005 to 5e15
 * @param b second shape, 0.0005 to 5e15
 * @returns probability in [0, 1]; measured accuracy: see the README of this room
 * @throws DomainError naming the argument outside its range
 * @source DiDonato & Morris (1992), ACM TOMS 18, 360-373; DLMF 8.17
 */
export function betaLowerTail(x: number, a: number, b: number): number {
  checkArguments(x, a, b);
  return incompleteBeta(a, b, x, 1 - x, excessAt(x, a, b));
}

/** Upper tail of the beta distribution, P(X >= x), computed directly. See `betaLowerTail`. */
export function betaUpperTail(x: number, a: number, b: number): number {
  checkArguments(x, a, b);
  return incompleteBeta(b, a, 1 - x, x, -excessAt(x, a, b));
}

/** Natural logarithm of the lower tail, also where the tail itself underflows. See `betaLowerTail`. */
export function betaLogLowerTail(x: number, a: number, b: number): number {
  checkArguments(x, a, b);
  return logIncompleteBeta(a, b, x, 1 - x, excessAt(x, a, b));
}

/** Natural logarithm of the upper tail, also where the tail itself underflows. See `betaLowerTail`. */
export function betaLogUpperTail(x: number, a: number, b: number): number {
  checkArguments(x, a, b);
  return logIncompleteBeta(b, a, 1 - x, x, -excessAt(x, a, b));
}

function quantile(lower: number, upper: number, a: number, b: number): number {
  requireShape("a", a);
  requireShape("b", b);
  if (lower === 0) return 0;
  if (upper === 0) return 1;
  // x / (1 - x) = (a / b) F with 2a and 2b degrees of freedom
  const logOdds = Math.log(a / b) + logRatioUpperQuantile(upper, lower, a, b);
  return logOdds < 0 ? Math.exp(logOdds) / (1 + Math.exp(logOdds)) : 1 / (1 + Math.exp(-logOdds));
}

/**
 * Lower quantile of the beta distribution: the value below which a share p lies.
 *
 * @param p 0 <= p <= 1
 * @param a first shape, 0.0005 to 5e15
 * @param b second shape, 0.0005 to 5e15
 * @throws DomainError naming the argument outside its range
 */
export function betaQuantile(p: number, a: number, b: number): number {
  requireProbability("p", p);
  return quantile(p, 1 - p, a, b);
}

/** Upper quantile of the beta distribution: the value that a share p exceeds. See `betaQuantile`. */
export function betaUpperQuantile(p: number, a: number, b: number): number {
  requireProbability("p", p);
  return quantile(1 - p, p, a, b);
}
