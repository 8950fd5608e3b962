/** The standard normal distribution and the error function. */
import { requireNumber, requireProbability } from "./argument-checks.ts";
import { millsRatioCoefficients } from "./coefficients.ts";
import { halfLogTwoPi } from "./gamma-function.ts";

const oneOverSqrtTwoPi = 0.3989422804014327;
const sqrtTwo = Math.SQRT2;
const splitter = 134217729; // 2^27 + 1: Veltkamp's splitting of a double in two halves

/** exp(-z^2 / 2) with the rounding error of z^2 put back, so that far tails keep their digits. */
function gaussianKernel(z: number): number {
  const square = z * z;
  if (square > 1500) return 0;
  const shifted = splitter * z;
  const high = shifted - (shifted - z);
  const low = z - high;
  const roundingError = high * high - square + 2 * high * low + low * low;
  return Math.exp(-0.5 * square) * (1 - 0.5 * roundingError);
}

/** Upper tail divided by density at z >= 0 (Mills' ratio), by piecewise interpolants. */
export function millsRatio(z: number): number {
  const u = 4 / (4 + z);
  const piece = u * 16;
  let row = Math.floor(piece);
  if (row > 15) row = 15;
  const s = 2 * (piece - row) - 1;
  const at = row * 11;
  const c = millsRatioCoefficients;
  // Estrin's scheme: shorter chains of dependent operations than Horner's
  const s2 = s * s;
  const s4 = s2 * s2;
  const low = c[at]! + c[at + 1]! * s + (c[at + 2]! + c[at + 3]! * s) * s2;
  const middle = c[at + 4]! + c[at + 5]! * s + (c[at + 6]! + c[at + 7]! * s) * s2;
  const high = c[at + 8]! + c[at + 9]! * s + c[at + 10]! * s2;
  return u * (low + s4 * (middle + s4 * high));
}

/** Upper tail at z >= 0. */
function tailBeyond(z: number): number {
  const kernel = gaussianKernel(z);
  return kernel === 0 ? 0 : oneOverSqrtTwoPi * kernel * millsRatio(z);
}

/**
 * Upper tail of the standard normal distribution, P(Z >= z), computed directly.
 *
 * @param z any number, also +-Infinity
 * @returns probability in [0, 1]
 * @throws DomainError when z is NaN
 * @source DLMF 7.2, 7.18; interpolants of Mills' ratio from 60-digit values
 */
export function normalUpperTail(z: number): number {
  if (z >= 0) return tailBeyond(z);
  requireNumber("z", z);
  return 1 - tailBeyond(-z);
}

/** Lower tail of the standard normal distribution, P(Z <= z). See `normalUpperTail`. */
export function normalLowerTail(z: number): number {
  if (z <= 0) return tailBeyond(-z);
  requireNumber("z", z);
  return 1 - tailBeyond(z);
}

/**
 * Natural logarithm of the upper tail of the standard normal distribution, also where the tail itself underflows.
 *
 * @param z any number, also +-Infinity
 * @throws DomainError when z is NaN
 */
export function normalLogUpperTail(z: number): number {
  requireNumber("z", z);
  if (z < 0) return Math.log1p(-tailBeyond(-z));
  if (z < 1) return Math.log(tailBeyond(z));
  if (z === Infinity) return -Infinity;
  return -0.5 * z * z - halfLogTwoPi + Math.log(millsRatio(z));
}

/**
 * Density of the standard normal distribution.
 *
 * @param z any number
 * @throws DomainError when z is NaN
 */
export function normalDensity(z: number): number {
  requireNumber("z", z);
  return oneOverSqrtTwoPi * gaussianKernel(z);
}

/**
 * Complementary error function, 2 times the upper tail of the normal distribution at x sqrt(2).
 *
 * @param x any number
 * @throws DomainError when x is NaN
 * @source DLMF 7.2.2
 */
export function errorFunctionComplement(x: number): number {
  requireNumber("x", x);
  if (x < 0) return 2 - errorFunctionComplement(-x);
  const square = x * x;
  if (square > 750) return 0;
  const shifted = splitter * x;
  const high = shifted - (shifted - x);
  const low = x - high;
  const roundingError = high * high - square + 2 * high * low + low * low;
  return 2 * oneOverSqrtTwoPi * Math.exp(-square) * (1 - roundingError) * millsRatio(x * sqrtTwo);
}

/**
 * Error function, odd in x, with full relative accuracy at 0.
 *
 * @param x any number
 * @throws DomainError when x is NaN
 * @source DLMF 7.2.1, 7.6.2
 */
export function errorFunction(x: number): number {
  requireNumber("x", x);
  if (x < 0) return -errorFunction(-x);
  if (x > 0.8) return 1 - errorFunctionComplement(x);
  // DLMF 7.6.2: 2/sqrt(pi) exp(-x^2) x sum (2 x^2)^n / (1 3 5 ... (2n+1)), positive terms
  const step = 2 * x * x;
  let term = 1;
  let sum = 1;
  for (let n = 1; term > 1e-17 * sum; n++) {
    term *= step / (2 * n + 1);
    sum += term;
  }
  return 1.1283791670955126 * x * Math.exp(-x * x) * sum;
}

/** Wichura (1988), algorithm AS 241, PPND16; the tables of coefficients a, b (centre), c, d (middle), e, f (far). */
function lowerQuantileMagnitude(tail: number): number {
  let r = Math.sqrt(-Math.log(tail));
  if (r <= 5) {
    r -= 1.6;
    return (
      (((((((0.0007745450142783414 * r + 0.022723844989269184) * r + 0.2417807251774506) * r + 1.2704582524523684) * r +
        3.6478483247632045) *
        r +
        5.769497221460691) *
        r +
        4.630337846156546) *
        r +
        1.4234371107496835) /
      (((((((1.0507500716444169e-9 * r + 0.0005475938084995345) * r + 0.015198666563616457) * r + 0.14810397642748008) *
        r +
        0.6897673349851) *
        r +
        1.6763848301838038) *
        r +
        2.053191626637759) *
        r +
        1)
    );
  }
  r -= 5;
  return (
    (((((((2.0103343992922881e-7 * r + 0.000027115555687434876) * r + 0.0012426609473880784) * r +
      0.026532189526576124) *
      r +
      0.29656057182850487) *
      r +
      1.7848265399172913) *
      r +
      5.463784911164114) *
      r +
      6.657904643501103) /
    (((((((2.0442631033899397e-15 * r + 1.421511758316446e-7) * r + 0.000018463183175100548) * r +
      0.0007868691311456133) *
      r +
      0.014875361290850615) *
      r +
      0.1369298809227358) *
      r +
      0.599832206555888) *
      r +
      1)
  );
}

/** The quantile at 1/2 + offset, |offset| <= 0.425 (AS 241, centre). */
function centralQuantile(offset: number): number {
  const r = 0.180625 - offset * offset;
  return (
    (offset *
      (((((((2509.0809287301227 * r + 33430.57558358813) * r + 67265.7709270087) * r + 45921.95393154987) * r +
        13731.69376550946) *
        r +
        1971.5909503065513) *
        r +
        133.14166789178438) *
        r +
        3.3871328727963665)) /
    (((((((5226.495278852854 * r + 28729.085735721943) * r + 39307.89580009271) * r + 21213.794301586597) * r +
      5394.196021424751) *
      r +
      687.1870074920579) *
      r +
      42.31333070160091) *
      r +
      1)
  );
}

/**
 * Lower quantile of the standard normal distribution: the z below which a share p lies.
 *
 * @param p 0 <= p <= 1; 0 and 1 give -Infinity and Infinity
 * @returns z; for small upper tails ask `normalUpperQuantile`, since 1 - p has lost its digits
 * @throws DomainError for p outside [0, 1]
 * @source Wichura (1988), Applied Statistics 37, 477-484 (AS 241)
 */
export function normalQuantile(p: number): number {
  requireProbability("p", p);
  const offset = p - 0.5;
  if (offset <= 0.425 && offset >= -0.425) return centralQuantile(offset);
  if (p === 0) return -Infinity;
  if (p === 1) return Infinity;
  return offset < 0 ? -lowerQuantileMagnitude(p) : lowerQuantileMagnitude(1 - p);
}

/** Upper quantile of the standard normal distribution: the z above which a share p lies. See `normalQuantile`. */
export function normalUpperQuantile(p: number): number {
  return 0 - normalQuantile(p);
}
