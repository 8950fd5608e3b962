/**
 * The regularized incomplete beta function I_x(a, b): the one integral behind the t, F and beta distributions.
 *
 * A point is handed over in five numbers, so that no caller loses digits by forming 1 - x: x, y = 1 - x, and
 * `excess` = (a y - b x) seen from x, that is a - (a + b) x; all with full relative accuracy.
 */
import { halfLogTwoPi, logOnePlusMinus, stirlingError } from "./gamma-function.ts";
import { largeBetaTailOverKernel, largeShape } from "./large-shape-tails.ts";

const tiny = 1e-17;
/** Never reached: where both shapes are large enough to need this many steps, quadrature takes over. */
const stepLimit = 100_000;

/** log(share / expected) where share = expected (1 + e): from e near 1, from the shares far away. */
function logRelative(share: number, expected: number, e: number): number {
  return e > -0.5 && e < 1 ? Math.log1p(e) : Math.log(share / expected);
}

/**
 * log(x^a y^b / B(a, b)), the density of the log odds.
 *
 * With n = a + b it is a log(n x / a) + b log(n y / b) + log(a b / (2 pi n)) / 2 + stirling(n) - stirling(a) - stirling(b),
 * whose first two terms cancel to first order around the mean; the cancellation is done on paper.
 *
 * @param excess a - (a + b) x, accurate also where it is small
 * @source DiDonato & Morris (1992), ACM TOMS 18, 360-373, section 4; deviance form after Loader (2000)
 */
export function logBetaKernel(a: number, b: number, x: number, y: number, excess: number): number {
  const n = a + b;
  const ex = -excess / a;
  const ey = excess / b;
  const exponent =
    ex > -0.3 && ex < 0.4 && ey > -0.3 && ey < 0.4
      ? a * logOnePlusMinus(ex) + b * logOnePlusMinus(ey)
      : a * logRelative(x, a / n, ex) + b * logRelative(y, b / n, ey);
  return exponent + 0.5 * Math.log(a * (b / n)) - halfLogTwoPi + stirlingError(n) - stirlingError(a) - stirlingError(b);
}

/**
 * I_x(a, b) divided by x^a y^b / B(a, b), for x at or below the mean a / (a + b).
 *
 * The power series where it is short; near the mean of large shapes quadrature; else the continued fraction.
 * @source power series DLMF 8.17.8 transformed to positive terms; continued fraction DiDonato & Morris (1992), eq. 9
 */
export function betaTailOverKernel(a: number, b: number, x: number, y: number, excess: number): number {
  if (x * (a + b + 8) < 0.7 * (a + 9)) return betaSeries(a, b, x);
  if (a > largeShape && b > largeShape) return largeBetaTailOverKernel(a, b, excess / (b * x));
  return betaFraction(a, b, x, y, excess);
}

/** (1/a) sum of (a+b)(a+b+1)...(a+b+k-1) / ((a+1)...(a+k)) x^k: all terms positive. */
export function betaSeries(a: number, b: number, x: number): number {
  let term = 1;
  let sum = 1;
  let numerator = a + b;
  let denominator = a + 1;
  do {
    term *= (numerator / denominator) * x;
    sum += term;
    numerator += 1;
    denominator += 1;
  } while (term > tiny * sum);
  return sum / a;
}

function betaFraction(a: number, b: number, x: number, y: number, excess: number): number {
  const oneMoreY = 1 + y;
  // convergents numerator / denominator, not normalised at each step: a division there would hold up the next step
  let numeratorBefore = 0;
  let denominatorBefore = 1;
  let numerator = 1;
  let inverse = 1 / (a + 1);
  let denominator = a * inverse * (excess + 1);
  for (let n = 1; n < stepLimit; n++) {
    const w = n * (b - n) * x;
    const alpha = (a + n - 1) * inverse * ((a + b + n - 1) * inverse) * w * x;
    const following = 1 / (a + 2 * n + 1);
    const beta = n + w * inverse + (a + n) * following * (excess + 1 + n * oneMoreY);
    inverse = following;
    let numeratorNext = beta * numerator + alpha * numeratorBefore;
    let denominatorNext = beta * denominator + alpha * denominatorBefore;
    const cross = numeratorNext * denominator;
    if (Math.abs(cross - numerator * denominatorNext) <= 4e-16 * Math.abs(cross))
      return numeratorNext / denominatorNext;
    if (denominatorNext > 1e100 || denominatorNext < 1e-100) {
      const scale = 1 / denominatorNext;
      numeratorNext *= scale;
      denominatorNext = 1;
      numerator *= scale;
      denominator *= scale;
    }
    numeratorBefore = numerator;
    denominatorBefore = denominator;
    numerator = numeratorNext;
    denominator = denominatorNext;
  }
  throw new Error("the continued fraction of the incomplete beta function did not settle");
}

/** I_x(a, b) at a point given by x, y and excess. */
export function incompleteBeta(a: number, b: number, x: number, y: number, excess: number): number {
  if (excess >= 0) {
    if (x === 0) return 0;
    return Math.min(1, Math.exp(logBetaKernel(a, b, x, y, excess)) * betaTailOverKernel(a, b, x, y, excess));
  }
  if (y === 0) return 1;
  return Math.max(0, 1 - Math.exp(logBetaKernel(b, a, y, x, -excess)) * betaTailOverKernel(b, a, y, x, -excess));
}

/** log I_x(a, b), also where I_x(a, b) itself underflows. */
export function logIncompleteBeta(a: number, b: number, x: number, y: number, excess: number): number {
  if (excess >= 0) {
    if (x === 0) return -Infinity;
    return logBetaKernel(a, b, x, y, excess) + Math.log(betaTailOverKernel(a, b, x, y, excess));
  }
  if (y === 0) return 0;
  return Math.log1p(-Math.exp(logBetaKernel(b, a, y, x, -excess)) * betaTailOverKernel(b, a, y, x, -excess));
}
