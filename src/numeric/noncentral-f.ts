/** The noncentral F distribution: the ratio of mean squares when the means do differ. */
import {
  areUnlimited,
  requireDegreesOfFreedom,
  requireFinite,
  requireNonNegative,
  requireNonNegativeFinite,
  requireOpenProbability,
  requireProbability,
} from "./argument-checks.ts";
import { fLowerTail, fQuantile, fUpperTail } from "./f.ts";
import { logBetaKernel, logIncompleteBeta } from "./incomplete-beta.ts";
import { increasingRoot } from "./monotone-root.ts";
import {
  noncentralChiSquareLower,
  noncentralChiSquareQuantile,
  noncentralChiSquareUpper,
  negligibleNoncentrality,
} from "./noncentral-chi-square.ts";
import { normalQuantile, normalUpperQuantile } from "./normal.ts";
import { type MixtureMembers, mixtureLowerTail, mixtureUpperTail } from "./poisson-mixture.ts";

/** Central tails with shapes b + j (numerator) and a (denominator), at the share of the numerator in the sum of squares. */
export function ratioMembers(ratio: number, b: number, a: number): MixtureMembers {
  const inverse = 1 / ratio;
  const right = ratio > 1;
  const sum = right ? a * inverse + b : a + b * ratio;
  const x = right ? (a * inverse) / sum : a / sum;
  const y = right ? b / sum : (b * ratio) / sum;
  const baseExcess = right ? a * ((b * ((ratio - 1) * inverse)) / sum) : a * ((b * (ratio - 1)) / sum);
  // a - (a + b + j) x, seen from x
  const excess = (j: number) => baseExcess - j * x;
  return {
    logLower: (j) => logIncompleteBeta(b + j, a, y, x, -excess(j)),
    logUpper: (j) => logIncompleteBeta(a, b + j, x, y, excess(j)),
    logDifference: (j) => logBetaKernel(b + j, a, y, x, -excess(j)) - Math.log(b + j),
    differenceRatio: (j) => (y * (a + b + j)) / (b + j + 1),
  };
}

function isAboveMean(ratio: number, df1: number, noncentrality: number): boolean {
  return ratio > 1 + noncentrality / df1;
}

function isCentral(df1: number, noncentrality: number): boolean {
  return noncentrality < negligibleNoncentrality || areUnlimited(df1);
}

/** Lower tail without checks. */
function lowerTail(ratio: number, df1: number, df2: number, noncentrality: number): number {
  if (ratio === 0) return 0;
  if (ratio === Infinity) return 1;
  if (isCentral(df1, noncentrality)) return fLowerTail(ratio, df1, df2);
  if (areUnlimited(df2)) return noncentralChiSquareLower(ratio * df1, df1, noncentrality);
  const members = ratioMembers(ratio, df1 / 2, df2 / 2);
  return isAboveMean(ratio, df1, noncentrality)
    ? 1 - mixtureUpperTail(members, noncentrality / 2)
    : mixtureLowerTail(members, noncentrality / 2);
}

/** Upper tail without checks. */
function upperTail(ratio: number, df1: number, df2: number, noncentrality: number): number {
  if (ratio === 0) return 1;
  if (ratio === Infinity) return 0;
  if (isCentral(df1, noncentrality)) return fUpperTail(ratio, df1, df2);
  if (areUnlimited(df2)) return noncentralChiSquareUpper(ratio * df1, df1, noncentrality);
  const members = ratioMembers(ratio, df1 / 2, df2 / 2);
  return isAboveMean(ratio, df1, noncentrality)
    ? mixtureUpperTail(members, noncentrality / 2)
    : 1 - mixtureLowerTail(members, noncentrality / 2);
}

/** Normal score of the lower tail, from whichever tail has its digits. */
function lowerScore(ratio: number, df1: number, df2: number, noncentrality: number): number {
  return isAboveMean(ratio, df1, noncentrality)
    ? normalUpperQuantile(upperTail(ratio, df1, df2, noncentrality))
    : normalQuantile(lowerTail(ratio, df1, df2, noncentrality));
}

function checkArguments(ratio: number, df1: number, df2: number, noncentrality: number): void {
  requireNonNegative("ratio", ratio);
  requireDegreesOfFreedom("df1", df1);
  requireDegreesOfFreedom("df2", df2);
  requireNonNegativeFinite("noncentrality", noncentrality);
}

/**
 * Lower tail of the noncentral F distribution, P(F <= ratio), computed directly.
 *
 * @param ratio F, no unit; 0 <= ratio <= Infinity
 * @param df1 numerator degrees of freedom, >= 0.001, fractions allowed, Infinity allowed (then nothing of the noncentrality is left)
 * @param df2 denominator degrees of freedom, >= 0.001, fractions allowed; Infinity gives noncentral chi-square over df1
 * @param noncentrality sum of squared standardised effects (n times f squared, all observations), >= 0 and finite
 * @returns probability in [0, 1]; measured accuracy: see the README of this room
 * @throws DomainError naming the argument outside its range
 * @source Poisson mixture of incomplete beta functions, Tang (1938); summed around its largest term, positive terms only
 */
export function noncentralFLowerTail(ratio: number, df1: number, df2: number, noncentrality: number): number {
  checkArguments(ratio, df1, df2, noncentrality);
  return lowerTail(ratio, df1, df2, noncentrality);
}

/** Upper tail of the noncentral F distribution, P(F >= ratio): the power of an F test with critical value `ratio`. See `noncentralFLowerTail`. */
export function noncentralFUpperTail(ratio: number, df1: number, df2: number, noncentrality: number): number {
  checkArguments(ratio, df1, df2, noncentrality);
  return upperTail(ratio, df1, df2, noncentrality);
}

/**
 * Lower quantile of the noncentral F distribution: the ratio below which a share p lies.
 *
 * @param p 0 <= p <= 1
 * @throws DomainError naming the argument outside its range
 */
export function noncentralFQuantile(p: number, df1: number, df2: number, noncentrality: number): number {
  requireProbability("p", p);
  checkArguments(1, df1, df2, noncentrality);
  if (isCentral(df1, noncentrality)) return fQuantile(p, df1, df2);
  if (p === 0) return 0;
  if (p === 1) return Infinity;
  if (areUnlimited(df2)) return noncentralChiSquareQuantile(p, df1, noncentrality) / df1;
  const target = normalQuantile(p);
  const mean = df1 + noncentrality;
  const spread = Math.min(1, Math.sqrt((2 * (mean + noncentrality)) / (mean * mean) + 2 / df2));
  const start = Math.log(mean / df1) + Math.max(-3, Math.min(3, target * spread));
  const score = (logRatio: number) => lowerScore(Math.exp(logRatio), df1, df2, noncentrality) - target;
  return Math.exp(increasingRoot(score, start, 0.2 * spread, -745, 709));
}

/**
 * The noncentrality at which an F ratio at least as large as the observed one has a given probability: the limits of an
 * interval for the noncentrality (probability alpha / 2 gives the lower, 1 - alpha / 2 the upper limit).
 *
 * @param question.ratio observed F, >= 0 and finite
 * @param question.df1 numerator degrees of freedom, >= 0.001 and finite
 * @param question.df2 denominator degrees of freedom, >= 0.001, Infinity allowed
 * @param question.probability wanted upper tail at the observed ratio, 0 < p < 1
 * @returns noncentrality >= 0; 0 where even without any effect the tail is at least that large
 * @throws DomainError naming the argument outside its range
 * @source inversion of the test, Steiger & Fouladi (1997)
 */
export function noncentralityForF(question: {
  readonly ratio: number;
  readonly df1: number;
  readonly df2: number;
  readonly probability: number;
}): number {
  const { ratio, df1, df2, probability } = question;
  requireNonNegative("ratio", ratio);
  requireFinite("ratio", ratio);
  requireDegreesOfFreedom("df1", df1);
  requireFinite("df1", df1);
  requireDegreesOfFreedom("df2", df2);
  requireOpenProbability("probability", probability);
  if (ratio === 0 || fUpperTail(ratio, df1, df2) >= probability) return 0;
  const target = normalUpperQuantile(probability);
  // in the square root of the noncentrality the normal score is nearly a straight line
  const score = (root: number) => target - lowerScore(ratio, df1, df2, root * root);
  const start = Math.sqrt(Math.max(0.25, df1 * (ratio - 1)));
  const root = increasingRoot(score, start, 0.5 + start / 8, 0, 1e8);
  return root * root;
}
