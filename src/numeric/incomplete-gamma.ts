/** The regularized incomplete gamma functions P(a, x) and Q(a, x): the integrals behind the gamma and chi-square distributions. */
import { requireNonNegative, requireShape } from "./argument-checks.ts";
import { halfLogTwoPi, logGammaOnePlus, logOnePlusMinus, stirlingError } from "./gamma-function.ts";
import { largeGammaTailOverKernel, largeShape } from "./large-shape-tails.ts";

/**
 * log(x^a e^-x / Gamma(a)), the density of log x.
 * @source DLMF 8.2; deviance form after Loader (2000)
 */
export function logGammaKernel(a: number, x: number): number {
  const e = (x - a) / a;
  const exponent = e > -0.3 && e < 0.4 ? a * logOnePlusMinus(e) : a * Math.log(x / a) - (x - a);
  return exponent + 0.5 * Math.log(a) - halfLogTwoPi - stirlingError(a);
}

/** Never reached: where the shape is large enough to need this many steps, quadrature takes over. */
const stepLimit = 100_000;

/** P(a, x) over the kernel, for x at or below about a. */
function lowerOverKernel(a: number, x: number): number {
  return a > largeShape && x > 0.7 * a ? largeGammaTailOverKernel(a, (x - a) / a, -1) : gammaSeries(a, x);
}

/** Q(a, x) over the kernel, for x at or above a. */
function upperOverKernel(a: number, x: number): number {
  return a > largeShape && x < 2 * a ? largeGammaTailOverKernel(a, (x - a) / a, 1) : gammaFraction(a, x);
}

/** P(a, x) over the kernel: (1/a) sum x^k / ((a+1)...(a+k)), DLMF 8.7.1. */
function gammaSeries(a: number, x: number): number {
  let term = 1;
  let sum = 1;
  let denominator = a + 1;
  do {
    term *= x / denominator;
    sum += term;
    denominator += 1;
  } while (term > 1e-17 * sum);
  return sum / a;
}

/** Q(a, x) over the kernel: even part of Legendre's continued fraction, DLMF 8.9.2. */
function gammaFraction(a: number, x: number): number {
  let numeratorBefore = 0;
  let denominatorBefore = 1;
  let numerator = 1;
  let denominator = x + 1 - a;
  for (let n = 1; n < stepLimit; n++) {
    const alpha = n * (a - n);
    const beta = x + 2 * n + 1 - a;
    let numeratorNext = beta * numerator + alpha * numeratorBefore;
    let denominatorNext = beta * denominator + alpha * denominatorBefore;
    const cross = numeratorNext * denominator;
    if (Math.abs(cross - numerator * denominatorNext) <= 4e-16 * Math.abs(cross))
      return numeratorNext / denominatorNext;
    if (denominatorNext > 1e100) {
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
  throw new Error("the continued fraction of the incomplete gamma function did not settle");
}

/** Q(a, x) for small a and x, without taking a number near 1 from 1: P = x^a / Gamma(1 + a) (1 + a sum (-x)^k / (k! (a + k))). */
function smallShapeUpper(a: number, x: number): number {
  let power = 1;
  let sum = 0;
  for (let k = 1; k < 60; k++) {
    power *= -x / k;
    const term = power / (a + k);
    sum += term;
    if (Math.abs(term) < 1e-18) break;
  }
  return -Math.expm1(a * Math.log(x) - logGammaOnePlus(a) + Math.log1p(a * sum));
}

/** Whether Q is computed directly at this point (else P is). */
function upperIsDirect(a: number, x: number): boolean {
  return x >= a && x >= 1.5;
}

/** P(a, x) without checks. */
export function gammaLower(a: number, x: number): number {
  if (x === 0) return 0;
  if (x === Infinity) return 1;
  const kernel = Math.exp(logGammaKernel(a, x));
  return upperIsDirect(a, x) ? 1 - kernel * upperOverKernel(a, x) : Math.min(1, kernel * lowerOverKernel(a, x));
}

/** Q(a, x) without checks. */
export function gammaUpper(a: number, x: number): number {
  if (x === 0) return 1;
  if (x === Infinity) return 0;
  if (upperIsDirect(a, x)) return Math.exp(logGammaKernel(a, x)) * upperOverKernel(a, x);
  if (a < 0.25 && x < 1.5) return smallShapeUpper(a, x);
  return Math.max(0, 1 - Math.exp(logGammaKernel(a, x)) * lowerOverKernel(a, x));
}

/** log P(a, x) without checks. */
export function logGammaLower(a: number, x: number): number {
  if (x === 0) return -Infinity;
  if (x === Infinity) return 0;
  if (upperIsDirect(a, x)) return Math.log1p(-gammaUpper(a, x));
  return logGammaKernel(a, x) + Math.log(lowerOverKernel(a, x));
}

/** log Q(a, x) without checks. */
export function logGammaUpper(a: number, x: number): number {
  if (x === 0) return 0;
  if (x === Infinity) return -Infinity;
  if (upperIsDirect(a, x)) return logGammaKernel(a, x) + Math.log(upperOverKernel(a, x));
  const upper = gammaUpper(a, x);
  return upper > 0.5 ? Math.log1p(-gammaLower(a, x)) : Math.log(upper);
}

/**
 * Regularized lower incomplete gamma function P(a, x).
 *
 * @param a 0.0005 to 5e15
 * @param x >= 0, Infinity allowed
 * @throws DomainError naming the argument outside its range
 * @source DLMF 8.2.4, 8.7.1, 8.9.2
 */
export function regularizedGammaLower(a: number, x: number): number {
  requireShape("a", a);
  requireNonNegative("x", x);
  return gammaLower(a, x);
}

/** Regularized upper incomplete gamma function Q(a, x) = 1 - P(a, x), computed directly. See `regularizedGammaLower`. */
export function regularizedGammaUpper(a: number, x: number): number {
  requireShape("a", a);
  requireNonNegative("x", x);
  return gammaUpper(a, x);
}
