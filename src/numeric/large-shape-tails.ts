/**
 * Tails of the gamma and beta distributions for shapes so large that series and continued fractions grow long: their
 * number of steps goes with the square root of the shape, that of a quadrature does not. Only near the mean: far out the
 * series and fractions are short again.
 */
import { logOnePlusMinus } from "./gamma-function.ts";
import { integrateAdaptively } from "./kronrod-quadrature.ts";

/** Gamma shape, or smaller beta shape, above which quadrature is taken; about where the times are equal. */
export const largeShape = 1e6;

/** Integral of exp(logDensity(s) - logDensity(0)) over s > 0, for a log density that is concave and falls from s = 0 on. */
function tailIntegral(logDensity: (s: number) => number, width: number): number {
  const atStart = logDensity(0);
  const breakpoints = [0];
  let stop = width;
  let stride = width;
  while (logDensity(stop) > atStart - 41) {
    breakpoints.push(stop);
    stride *= 2;
    stop += stride;
  }
  breakpoints.push(stop);
  return integrateAdaptively((s) => Math.exp(logDensity(s) - atStart), breakpoints, 1e-11);
}

/**
 * Upper (direction 1) or lower (direction -1) tail of the gamma distribution with shape a at x, over x^a e^-x / Gamma(a).
 * @param e (x - a) / a; of the sign of `direction`, or 0
 */
export function largeGammaTailOverKernel(a: number, e: number, direction: 1 | -1): number {
  const start = Math.log1p(e);
  const logDensity = (s: number) => a * logOnePlusMinus(Math.expm1(start + direction * s));
  return tailIntegral(logDensity, 1 / (Math.sqrt(a) + a * Math.abs(e)));
}

/**
 * I_x(a, b) over x^a (1 - x)^b / B(a, b), for x at or below the mean, by integration over the log odds.
 * @param e ratio - 1 >= 0, where ratio = (a / b) (1 - x) / x
 */
export function largeBetaTailOverKernel(a: number, b: number, e: number): number {
  const start = Math.log1p(e);
  const logDensity = (s: number) => {
    const step = Math.expm1(start + s);
    const sum = a + b + b * step;
    return a * logOnePlusMinus(-b * (step / sum)) + b * logOnePlusMinus(a * (step / sum));
  };
  const slope = (a * (b * e)) / (a + b + b * e);
  return tailIntegral(logDensity, 1 / (Math.sqrt((a / (a + b)) * b) + slope));
}
