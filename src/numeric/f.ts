/** The F distribution: the ratio of two independent mean squares. */
import { areUnlimited, requireDegreesOfFreedom, requireNonNegative, requireProbability } from "./argument-checks.ts";
import { betaSeries, betaTailOverKernel, incompleteBeta, logBetaKernel, logIncompleteBeta } from "./incomplete-beta.ts";
import { logBeta } from "./gamma-function.ts";
import { gammaLower, gammaUpper, logGammaLower, logGammaUpper } from "./incomplete-gamma.ts";
import { standardGammaQuantile } from "./gamma.ts";
import { guardedStep } from "./monotone-root.ts";
import { normalUpperQuantile } from "./normal.ts";

function checkArguments(ratio: number, df1: number, df2: number): void {
  requireNonNegative("ratio", ratio);
  requireDegreesOfFreedom("df1", df1);
  requireDegreesOfFreedom("df2", df2);
}

/**
 * Upper tail for half degrees of freedom b (numerator) and a (denominator), finite, without checks.
 * The shares x = a / (a + b F) and y = 1 - x are formed from whichever of F and 1 / F cannot overflow; F - 1 is exact near 1.
 */
export function ratioUpperTail(ratio: number, b: number, a: number): number {
  if (ratio <= 1) {
    const sum = a + b * ratio;
    return incompleteBeta(a, b, a / sum, (b * ratio) / sum, a * ((b * (ratio - 1)) / sum));
  }
  const inverse = 1 / ratio;
  const sum = a * inverse + b;
  const x = (a * inverse) / sum;
  const y = b / sum;
  const excess = a * ((b * ((ratio - 1) * inverse)) / sum);
  // few numerator df, just right of the mean: the tail is not small, the series of the other one short, the fraction long
  if (ratio < 2.7 && b <= 2 && y < 0.5) return 1 - Math.exp(logBetaKernel(b, a, y, x, -excess)) * betaSeries(b, a, y);
  return incompleteBeta(a, b, x, y, excess);
}

/** log of `ratioUpperTail`. */
export function logRatioUpperTail(ratio: number, b: number, a: number): number {
  if (ratio <= 1) {
    const sum = a + b * ratio;
    return logIncompleteBeta(a, b, a / sum, (b * ratio) / sum, a * ((b * (ratio - 1)) / sum));
  }
  const inverse = 1 / ratio;
  const sum = a * inverse + b;
  return logIncompleteBeta(a, b, (a * inverse) / sum, b / sum, a * ((b * ((ratio - 1) * inverse)) / sum));
}

/**
 * Upper tail of the F distribution: the probability of a ratio at least this large when no means differ.
 *
 * Regularized incomplete beta I_x(df2/2, df1/2) at x = df2 / (df2 + df1 * ratio), never 1 - cdf, so that tails
 * keep their digits. For df1 = 2 it equals (1 + 2 * ratio / df2) ** (-df2 / 2).
 *
 * @param ratio F, a ratio of mean squares, no unit; 0 <= ratio <= Infinity
 * @param df1 numerator degrees of freedom, >= 0.001, fractions allowed (epsilon corrections), Infinity allowed
 * @param df2 denominator degrees of freedom, >= 0.001; Infinity gives the chi-square limit
 * @returns probability in [0, 1]; measured accuracy: see the README of this room
 * @throws DomainError naming the argument, its value and the allowed range
 * @source DiDonato & Morris (1992), ACM TOMS 18, 360-373; DLMF 8.17
 */
export function fUpperTail(ratio: number, df1: number, df2: number): number {
  checkArguments(ratio, df1, df2);
  if (ratio === Infinity) return 0;
  if (areUnlimited(df1)) return areUnlimited(df2) ? (ratio <= 1 ? 1 : 0) : gammaLower(df2 / 2, df2 / (2 * ratio));
  if (areUnlimited(df2)) return gammaUpper(df1 / 2, (df1 / 2) * ratio);
  return ratioUpperTail(ratio, df1 / 2, df2 / 2);
}

/** Lower tail of the F distribution, P(F <= ratio), computed directly. See `fUpperTail`. */
export function fLowerTail(ratio: number, df1: number, df2: number): number {
  checkArguments(ratio, df1, df2);
  if (ratio === 0) return 0;
  if (ratio === Infinity) return 1;
  if (areUnlimited(df1)) return areUnlimited(df2) ? (ratio < 1 ? 0 : 1) : gammaUpper(df2 / 2, df2 / (2 * ratio));
  if (areUnlimited(df2)) return gammaLower(df1 / 2, (df1 / 2) * ratio);
  // 1 / F has the same distribution with the degrees of freedom exchanged; the point is kept, not inverted.
  const b = df1 / 2;
  const a = df2 / 2;
  if (ratio <= 1) {
    const sum = a + b * ratio;
    return incompleteBeta(b, a, (b * ratio) / sum, a / sum, b * ((a * (1 - ratio)) / sum));
  }
  const inverse = 1 / ratio;
  const sum = a * inverse + b;
  return incompleteBeta(b, a, b / sum, (a * inverse) / sum, b * ((a * ((1 - ratio) * inverse)) / sum));
}

/** Natural logarithm of the upper tail of F, also where the tail itself underflows. See `fUpperTail`. */
export function fLogUpperTail(ratio: number, df1: number, df2: number): number {
  checkArguments(ratio, df1, df2);
  if (ratio === Infinity) return -Infinity;
  if (areUnlimited(df1))
    return areUnlimited(df2) ? (ratio <= 1 ? 0 : -Infinity) : logGammaLower(df2 / 2, df2 / (2 * ratio));
  if (areUnlimited(df2)) return logGammaUpper(df1 / 2, (df1 / 2) * ratio);
  return logRatioUpperTail(ratio, df1 / 2, df2 / 2);
}

/**
 * log F at which the upper tail equals p, for half degrees of freedom b (numerator) and a (denominator).
 *
 * Halley's iteration on the log of the tail as a function of log F. That function is concave, and the start lies at or
 * right of the mean, so that Newton's step alone would already converge from any start.
 *
 * @param p upper tail, 0 < p < 1
 * @param complement 1 - p, with its own digits
 */
export function logRatioUpperQuantile(p: number, complement: number, b: number, a: number): number {
  if (p > 0.5) return -logRatioUpperQuantile(complement, p, a, b);
  const logTarget = Math.log(p);
  // so far out that only the first term x^a / (a B(a, b)) of the tail is left, it is solved on paper
  const far = Math.log(a / b) - (logTarget + Math.log(a) + logBeta(a, b)) / a;
  if (far > 300 && far - Math.log1p(a / b) > 40 + Math.log1p(a)) return far;
  const spread = Math.sqrt(1 / a + 1 / b);
  let logRatio = Math.max(0, Math.min(normalUpperQuantile(p) * spread + (1 / b - 1 / a) / 6, 700));
  if (a < 1) logRatio = Math.max(logRatio, Math.min(-logTarget / a - 5, 700));
  let low = -Infinity;
  let high = Infinity;
  for (let iteration = 0; iteration < 200; iteration++) {
    const inverse = Math.exp(-Math.abs(logRatio));
    const right = logRatio >= 0;
    const sum = right ? a * inverse + b : a + b * inverse;
    const x = right ? (a * inverse) / sum : a / sum;
    const y = right ? b / sum : (b * inverse) / sum;
    const excess = (right ? -1 : 1) * a * ((b * Math.expm1(-Math.abs(logRatio))) / sum);
    const logKernel = logBetaKernel(a, b, x, y, excess);
    const logTail =
      excess >= 0
        ? logKernel + Math.log(betaTailOverKernel(a, b, x, y, excess))
        : Math.log1p(-Math.exp(logKernel) * betaTailOverKernel(b, a, y, x, -excess));
    const gap = logTail - logTarget;
    const hazard = Math.exp(logKernel - logTail);
    const newton = gap / hazard;
    const curvature = 1 - (gap * (excess - hazard)) / (2 * hazard);
    const step = curvature > 0.5 && curvature < 2 ? newton / curvature : newton;
    if (gap > 0) low = logRatio;
    else high = logRatio;
    const next = guardedStep(logRatio + step, logRatio, low, high);
    const moved = Math.abs(next - logRatio);
    const converged = Math.abs(gap) < 1e-5 && next === logRatio + step;
    logRatio = next;
    // cubic convergence: what is left after this step is far below the last digit
    if (converged || moved <= 2e-16 * Math.abs(logRatio)) break;
  }
  return logRatio;
}

/** Both quantiles of F; `upper` is the share above, `lower` the share below, each with its own digits. */
function quantile(upper: number, lower: number, df1: number, df2: number): number {
  requireDegreesOfFreedom("df1", df1);
  requireDegreesOfFreedom("df2", df2);
  if (upper === 1) return areUnlimited(df1) && areUnlimited(df2) ? 1 : 0;
  if (upper === 0) return areUnlimited(df1) && areUnlimited(df2) ? 1 : Infinity;
  if (areUnlimited(df1)) return areUnlimited(df2) ? 1 : df2 / 2 / standardGammaQuantile(upper, lower, df2 / 2);
  if (areUnlimited(df2)) return standardGammaQuantile(lower, upper, df1 / 2) / (df1 / 2);
  return Math.exp(logRatioUpperQuantile(upper, lower, df1 / 2, df2 / 2));
}

/**
 * Lower quantile of F: the ratio below which a share p lies.
 *
 * @param p 0 <= p <= 1
 * @param df1 numerator degrees of freedom, >= 0.001, Infinity allowed
 * @param df2 denominator degrees of freedom, >= 0.001, Infinity allowed
 * @returns ratio in [0, Infinity]
 * @throws DomainError naming the argument, its value and the allowed range
 */
export function fQuantile(p: number, df1: number, df2: number): number {
  requireProbability("p", p);
  return quantile(1 - p, p, df1, df2);
}

/** Upper quantile of F: the critical value that a share p exceeds; p keeps its digits however small. See `fQuantile`. */
export function fUpperQuantile(p: number, df1: number, df2: number): number {
  requireProbability("p", p);
  return quantile(p, 1 - p, df1, df2);
}
