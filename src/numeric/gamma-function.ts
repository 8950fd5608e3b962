/** Gamma function on the log scale, and the pieces of it that keep the incomplete gamma and beta functions exact. */
import { requirePositive } from "./argument-checks.ts";
import {
  logGammaOneToTwo,
  logGammaTwoToThree,
  stirlingAtHalves,
  stirlingFourToEight,
  stirlingHalfToOne,
  stirlingOneToTwo,
  stirlingTwoToFour,
} from "./coefficients.ts";

/** log(2 pi) / 2. */
export const halfLogTwoPi = 0.9189385332046728;

/** A polynomial in ascending powers, by Horner's rule. */
function polynomial(coefficients: readonly number[], s: number): number {
  let sum = coefficients[coefficients.length - 1]!;
  for (let i = coefficients.length - 2; i >= 0; i--) sum = sum * s + coefficients[i]!;
  return sum;
}

/** log Gamma on [1, 3], with full relative accuracy around its zeros 1 and 2. */
function logGammaNearZeros(x: number): number {
  const smooth = x <= 2 ? polynomial(logGammaOneToTwo, 2 * x - 3) : polynomial(logGammaTwoToThree, 2 * x - 5);
  return (x - 1) * (x - 2) * smooth;
}

/** log Gamma(1 + x) for 0 <= x <= 1: no digit of a tiny x is lost. */
export function logGammaOnePlus(x: number): number {
  return x * (x - 1) * polynomial(logGammaOneToTwo, 2 * x - 1);
}

/**
 * What Stirling's formula misses: log Gamma(a) - (a - 1/2) log a + a - log(2 pi) / 2.
 *
 * @param a > 0, not checked
 * @source DLMF 5.11.1 for a >= 8; below, interpolants from 60-digit values
 */
export function stirlingError(a: number): number {
  const twice = 2 * a;
  if (twice <= 60 && twice === Math.floor(twice)) return stirlingAtHalves[twice]!;
  if (a >= 8) {
    const s = 1 / (a * a);
    if (a >= 100) return (0.08333333333333333 - s * (0.002777777777777778 - s * 0.0007936507936507937)) / a;
    // Bernoulli numbers B(2k) / (2k (2k - 1)), k = 1..10
    return (
      (0.08333333333333333 -
        s *
          (0.002777777777777778 -
            s *
              (0.0007936507936507937 -
                s *
                  (0.0005952380952380953 -
                    s *
                      (0.0008417508417508417 -
                        s *
                          (0.0019175269175269176 -
                            s *
                              (0.00641025641025641 -
                                s * (0.029550653594771242 - s * (0.17964437236883057 - s * 1.3924322169059011))))))))) /
      a
    );
  }
  if (a >= 4) return polynomial(stirlingFourToEight, (a - 4) / 2 - 1);
  if (a >= 2) return polynomial(stirlingTwoToFour, a - 3);
  if (a >= 1) return polynomial(stirlingOneToTwo, 2 * a - 3);
  if (a >= 0.5) return polynomial(stirlingHalfToOne, 4 * a - 3);
  return logGammaOnePlus(a) - (a + 0.5) * Math.log(a) + a - halfLogTwoPi;
}

/** log Gamma without the check of its argument, for the inner loops of this room. */
export function logGammaUnchecked(x: number): number {
  if (x >= 8) return (x - 0.5) * Math.log(x) - x + halfLogTwoPi + stirlingError(x);
  if (x >= 1) {
    let factor = 1;
    let rest = x;
    while (rest > 3) {
      rest -= 1;
      factor *= rest;
    }
    return factor === 1 ? logGammaNearZeros(rest) : Math.log(factor) + logGammaNearZeros(rest);
  }
  return logGammaOnePlus(x) - Math.log(x);
}

/**
 * Natural logarithm of the gamma function.
 *
 * @param x > 0, finite
 * @returns log Gamma(x), also accurate beside its zeros at 1 and 2
 * @throws DomainError for x <= 0, NaN or Infinity
 * @source DLMF 5.2, 5.11.1
 */
export function logGamma(x: number): number {
  requirePositive("x", x);
  return logGammaUnchecked(x);
}

/**
 * Natural logarithm of the beta function B(a, b) = Gamma(a) Gamma(b) / Gamma(a + b).
 *
 * @param a > 0, finite
 * @param b > 0, finite
 * @throws DomainError naming the argument outside its range
 * @source DLMF 5.12.1; the form with Stirling errors after DiDonato & Morris (1992), ACM TOMS 18, 360-373
 */
export function logBeta(a: number, b: number): number {
  requirePositive("a", a);
  requirePositive("b", b);
  const small = Math.min(a, b);
  const large = Math.max(a, b);
  const sum = small + large;
  if (large < 8) {
    return logGammaUnchecked(small) + logGammaUnchecked(large) - logGammaUnchecked(sum);
  }
  if (small < 1) {
    // Gamma(small) alone may be huge; the ratio of the other two is close to large^-small.
    const ratio = -(large - 0.5) * Math.log1p(small / large) - small * Math.log(sum) + small;
    return logGammaUnchecked(small) + ratio + (stirlingError(large) - stirlingError(sum));
  }
  return (
    -0.5 * Math.log(large) +
    halfLogTwoPi +
    (small - 0.5) * Math.log(small / sum) -
    large * Math.log1p(small / large) +
    (stirlingError(small) + stirlingError(large) - stirlingError(sum))
  );
}

/**
 * log(1 + e) - e without cancellation for small e.
 *
 * @param e > -1
 * @source with r = e / (2 + e): log(1 + e) = 2 (r + r^3/3 + r^5/5 + ...), DLMF 4.6.4; hence the difference is
 *   -r e + 2 (r^3/3 + r^5/5 + ...)
 */
export function logOnePlusMinus(e: number): number {
  if (e > 0.4 || e < -0.3) return Math.log1p(e) - e;
  const r = e / (2 + e);
  const s = r * r;
  // |r| <= 0.177 (e = -0.3): s^11 / 23 is below 1e-18 of the first term
  const series =
    1 / 3 +
    s *
      (1 / 5 +
        s *
          (1 / 7 +
            s * (1 / 9 + s * (1 / 11 + s * (1 / 13 + s * (1 / 15 + s * (1 / 17 + s * (1 / 19 + s * (1 / 21)))))))));
  return -r * (e - 2 * s * series);
}
