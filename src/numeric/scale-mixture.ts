/** Tails of ratios to a common standard deviation: the tail at known deviation, averaged over the deviation's own distribution. */
import { logOnePlusMinus, stirlingError } from "./gamma-function.ts";

/** A tail at known deviation, value(w) = scaled(w) exp(-decay w^2); the split keeps both factors inside the range of doubles. */
export interface ScaledTail {
  readonly decay: number;
  /** Largest step in log w that resolves the tail: a 36th part of 2 pi times the half-width of the strip around the real axis where it stays small. */
  readonly largestStep: number;
  scaled(w: number): number;
}

/** Above this many df the deviation counts as known: what is left is below the rounding of the tail. */
const knownDeviation = 1e20;

/**
 * Mean of tail(limit S) over S, where df S^2 is chi-square with df degrees of freedom.
 *
 * Trapezoidal rule in t = log S, whose integrand is analytic in a strip and falls off on both sides, so that the sum converges geometrically;
 * the step follows from the Fourier transform of the density, |Gamma((df + i f) / 2)|, at the frequency of the step.
 *
 * @param limit finite; any sign as long as the tail is defined there
 * @param df > 0, Infinity allowed
 * @source Trefethen & Weideman (2014), SIAM Review 56, 385-458, for the rule
 */
export function meanOverScale(tail: ScaledTail, limit: number, df: number): number {
  const { decay } = tail;
  if (df > knownDeviation) return tail.scaled(limit) * Math.exp(-decay * limit * limit);
  // a ratio that is a double, and its logarithm: then the k-th node is the k-th power to the last digit
  const ratio = Math.exp(Math.min(tail.largestStep, 1 / Math.sqrt(62 + 4.6 * df)));
  const step = Math.log(ratio);
  const narrow = df > 1000;
  const half = 0.5 * df;
  // density of t: sqrt(df / pi) exp(-stirlingError(df / 2)) exp(df (t - (exp(2 t) - 1) / 2))
  const factor = step * Math.sqrt(df / Math.PI) * Math.exp(-stirlingError(half));
  const termAt = (t: number, s: number): number => {
    const w = limit * s;
    const fromDensity = narrow ? logOnePlusMinus(Math.expm1(2 * t)) : 2 * t - (s * s - 1);
    const exponent = half * fromDensity - decay * w * w;
    return exponent < -745 ? 0 : tail.scaled(w) * Math.exp(exponent);
  };
  // the peak lies between that of the density alone and that with the far tail's exp(-decay w^2)
  const farthest = -0.5 * Math.log1p((2 * decay * limit * limit) / df);
  let start = 0;
  let best = termAt(0, 1);
  for (let part = 1; part <= 4; part++) {
    const t = (farthest * part) / 4;
    const term = termAt(t, Math.exp(t));
    if (term > best) {
      best = term;
      start = t;
    }
  }
  let sum = best;
  const middle = Math.exp(start);
  for (const direction of [1, -1]) {
    const growth = direction > 0 ? ratio : 1 / ratio;
    let before = best;
    let s = middle;
    for (let k = 1; k < 100000; k++) {
      s *= growth;
      const term = termAt(start + k * direction * step, s);
      sum += term;
      if (term <= before && term < 1e-17 * sum) break;
      before = term;
    }
  }
  return factor * sum;
}

const degree = 13;
const nodesPerPiece = degree + 1;

/**
 * A tail interpolated piece by piece, each piece made when it is first asked for. Analytic tails lose less than 1e-13 of
 * themselves when the pieces are short against the distance over which the scaled tail changes by a large factor.
 */
export function piecewiseTail(direct: ScaledTail, pieceWidth: number, end: number): ScaledTail {
  const pieces = Math.ceil(end / pieceWidth);
  const coefficients: (Float64Array | undefined)[] = new Array(pieces).fill(undefined);
  return {
    decay: direct.decay,
    largestStep: direct.largestStep,
    scaled(w) {
      const place = w / pieceWidth;
      if (!(place >= 0 && place < pieces)) return direct.scaled(w);
      const index = Math.floor(place);
      let c = coefficients[index];
      if (c === undefined) {
        c = interpolant(direct.scaled, index * pieceWidth, pieceWidth);
        coefficients[index] = c;
      }
      const s = 2 * (place - index) - 1;
      const s2 = s * s;
      // even and odd powers apart: two chains of half the length
      let even = c[12]!;
      let odd = c[13]!;
      even = even * s2 + c[10]!;
      odd = odd * s2 + c[11]!;
      even = even * s2 + c[8]!;
      odd = odd * s2 + c[9]!;
      even = even * s2 + c[6]!;
      odd = odd * s2 + c[7]!;
      even = even * s2 + c[4]!;
      odd = odd * s2 + c[5]!;
      even = even * s2 + c[2]!;
      odd = odd * s2 + c[3]!;
      return even * s2 + c[0]! + s * (odd * s2 + c[1]!);
    },
  };
}

const chebyshevNodes = Float64Array.from({ length: nodesPerPiece }, (_, i) =>
  Math.cos((Math.PI * (i + 0.5)) / nodesPerPiece),
);
/** Powers of s in each Chebyshev polynomial, row per polynomial. */
const chebyshevPowers: readonly Float64Array[] = (() => {
  const rows = [new Float64Array(nodesPerPiece), new Float64Array(nodesPerPiece)];
  rows[0]![0] = 1;
  rows[1]![1] = 1;
  for (let n = 2; n < nodesPerPiece; n++) {
    const row = new Float64Array(nodesPerPiece);
    for (let power = 0; power < nodesPerPiece; power++) {
      row[power] = (power > 0 ? 2 * rows[n - 1]![power - 1]! : 0) - rows[n - 2]![power]!;
    }
    rows.push(row);
  }
  return rows;
})();

/** Coefficients in powers of s on [-1, 1] of the polynomial through the Chebyshev points. */
function interpolant(f: (w: number) => number, start: number, width: number): Float64Array {
  const values = new Float64Array(nodesPerPiece);
  for (let i = 0; i < nodesPerPiece; i++) values[i] = f(start + (width * (chebyshevNodes[i]! + 1)) / 2);
  const powers = new Float64Array(nodesPerPiece);
  for (let n = 0; n < nodesPerPiece; n++) {
    let sum = 0;
    for (let i = 0; i < nodesPerPiece; i++) sum += values[i]! * Math.cos((Math.PI * n * (i + 0.5)) / nodesPerPiece);
    const coefficient = (n === 0 ? 1 : 2) * (sum / nodesPerPiece);
    const row = chebyshevPowers[n]!;
    for (let power = 0; power <= n; power++) powers[power]! += coefficient * row[power]!;
  }
  return powers;
}
