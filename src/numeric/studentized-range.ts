/** The studentized range: the range of independent means over their common, independently estimated, standard error. */
import { requireDegreesOfFreedom, requireOpenProbability } from "./argument-checks.ts";
import { DomainError } from "./domain-error.ts";
import { increasingRoot } from "./monotone-root.ts";
import { millsRatio, normalDensity, normalLowerTail, normalUpperTail } from "./normal.ts";
import { meanOverScale, piecewiseTail, type ScaledTail } from "./scale-mixture.ts";
import { tTwoSidedTail, tUpperQuantile } from "./t.ts";

const mostMeans = 1000;
const pieceWidth = 0.5;
/** Beyond this the range of up to 1000 normal variables is too wide only through one pair: what is left is below exp(-w^2 / 12). */
const onePairOnly = 26;

/** Trapezoidal nodes over the place of the largest variable; the step shrinks as the largest of many becomes sharper. */
interface Largest {
  readonly step: number;
  /** z of the first node */
  readonly first: number;
  readonly lowerTails: Float64Array;
  /** means times the density times lower tail^(means - 1) times the step */
  readonly weights: Float64Array;
}

function largestOf(means: number): Largest {
  const step = 0.4 / Math.sqrt(1 + 2 * Math.log(means));
  const first = -9;
  const count = Math.ceil((9 + onePairOnly + 9) / step);
  const lowerTails = new Float64Array(count);
  const weights = new Float64Array(count);
  for (let i = 0; i < count; i++) {
    const z = first + i * step;
    const lower = normalLowerTail(z);
    lowerTails[i] = lower;
    weights[i] =
      means *
      step *
      normalDensity(z) *
      (z > 0 ? Math.exp((means - 1) * Math.log1p(-normalUpperTail(z))) : lower ** (means - 1));
  }
  return { step, first, lowerTails, weights };
}

/** Tail of the range at known deviation: k times the integral of density(z) (Phi(z)^(k-1) - (Phi(z) - Phi(z - w))^(k-1)), no difference of near-equals. */
function rangeTail(means: number, nodes: Largest, w: number): number {
  const { step, first, lowerTails, weights } = nodes;
  const others = means - 1;
  let sum = 0;
  // the integrand peaks near the larger of w / 2 and the place of the largest variable; below z = w - 38 there is nothing
  const from = Math.max(0, Math.floor((w - 38 - first) / step));
  for (let i = from; i < weights.length; i++) {
    const below = normalLowerTail(first + i * step - w);
    if (below === 0) continue;
    const ratio = below / lowerTails[i]!;
    const missing = ratio >= 1 ? 1 : -Math.expm1(others * Math.log1p(-ratio));
    const term = weights[i]! * missing;
    sum += term;
    if (term < 1e-18 * sum && first + i * step > 0.5 * w + 1) break;
  }
  return sum;
}

/** Lower tail of the range, for small w: k times the integral of density(z + w/2) (Phi(z + w/2) - Phi(z - w/2))^(k-1). */
function rangeLowerTail(means: number, w: number): number {
  // for small w the integrand is the k-th power of a normal density
  const step = 0.5 / Math.sqrt(means);
  const half = w / 2;
  let sum = 0;
  for (const direction of [1, -1]) {
    for (let k = direction > 0 ? 0 : 1; ; k++) {
      const z = direction * k * step;
      // symmetric in z apart from the density: taken on the side where the tails are small
      const between = betweenNormals(Math.abs(z), half);
      const term = normalDensity(z + half) * between ** (means - 1);
      sum += term;
      if (!(term > 1e-18 * sum) && k * step > half) break;
    }
  }
  return means * step * sum;
}

/** P(middle - half < Z < middle + half), middle >= 0, without cancellation also for short intervals. */
function betweenNormals(middle: number, half: number): number {
  if (half < 0.25) {
    // Gauss-Legendre with 8 nodes is exact to the last digit over such a length
    let sum = 0;
    for (let i = 0; i < 4; i++) {
      const offset = half * eightNodes[i]!;
      sum += eightWeights[i]! * (normalDensity(middle - offset) + normalDensity(middle + offset));
    }
    return half * sum;
  }
  const low = middle - half;
  const high = middle + half;
  return low >= 0 ? normalUpperTail(low) - normalUpperTail(high) : 1 - normalUpperTail(-low) - normalUpperTail(high);
}
// DLMF 3.5, Gauss-Legendre with 8 nodes
const eightNodes = [0.1834346424956498, 0.525532409916329, 0.7966664774136267, 0.9602898564975363];
const eightWeights = [0.362683783378362, 0.31370664587788727, 0.22238103445337448, 0.10122853629037626];

/**
 * Interpolated tails by number of means. A memory of pure values, at most one entry per number of means: filled or empty, every answer is the same.
 */
const tails = new Map<number, ScaledTail>();

function tailFor(means: number): ScaledTail {
  let tail = tails.get(means);
  if (tail === undefined) {
    const nodes = largestOf(means);
    const pairs = means * (means - 1);
    const direct: ScaledTail = {
      decay: 0.25,
      largestStep: stepFor(means),
      scaled: (w) => {
        if (means === 2 || w >= onePairOnly) return pairs * 0.3989422804014327 * millsRatio(w * Math.SQRT1_2);
        return rangeTail(means, nodes, w) * Math.exp(0.25 * w * w);
      },
    };
    tail = piecewiseTail(direct, pieceWidth, onePairOnly);
    tails.set(means, tail);
  }
  return tail;
}

function requireMeans(means: number): void {
  if (!(Number.isInteger(means) && means >= 2 && means <= mostMeans))
    throw new DomainError("means", means, `a whole number from 2 to ${mostMeans}`);
}

/**
 * Upper tail of the studentized range: the probability that the largest and the smallest of `means` independent estimates with equal
 * true means differ by at least q of their standard errors.
 *
 * The tail of the range at known standard error, integrated over the place of the largest mean without cancellation, interpolated, then averaged over
 * the distribution of the standard error (`meanOverScale`). Two means: t, exactly.
 *
 * @param q range over standard error of one mean, >= 0, Infinity allowed
 * @param means how many, whole number from 2 to 1000
 * @param df of the standard error, > 0, fractions and Infinity allowed
 * @returns probability in [0, 1]; relative error below 1e-11 on all rows of the reference tables, see README
 * @throws DomainError naming the argument
 * @source Tukey (1953); distribution: Hartley (1942), Pearson & Hartley (1943)
 */
export function studentizedRangeUpperTail(q: number, means: number, df: number): number {
  if (!(q >= 0)) throw new DomainError("q", q, ">= 0, Infinity allowed");
  requireMeans(means);
  requireDegreesOfFreedom("df", df);
  if (q === 0) return 1;
  if (q === Infinity) return 0;
  if (means === 2) return tTwoSidedTail(q * Math.SQRT1_2, df);
  return Math.min(1, meanOverScale(tailFor(means), q, df));
}

/** Lower tail of the studentized range, small values computed directly. Arguments as for `studentizedRangeUpperTail`. */
export function studentizedRangeLowerTail(q: number, means: number, df: number): number {
  const upper = studentizedRangeUpperTail(q, means, df);
  if (upper < 0.5) return 1 - upper;
  if (q === 0) return 0;
  return Math.min(
    1,
    meanOverScale(
      {
        decay: 0,
        largestStep: stepFor(means) / 2,
        scaled: (w) =>
          w > 20 ? 1 - rangeTail(means, largestOf(means), Math.min(w, onePairOnly)) : rangeLowerTail(means, w),
      },
      q,
      df,
    ),
  );
}

/** The lower tail is about exp(-k^2 exp(-w^2 / 4)); it grows where the phase of the inner exponent passes a right angle, at pi / w of the median range w. */
function stepFor(means: number): number {
  return (2 * Math.PI * Math.min(Math.PI / 4, Math.PI / (1 + 5.2 * Math.log(means)))) / 36;
}

/**
 * The range that is reached with probability p when no means differ: critical value of the studentized range.
 *
 * @param p probability above it, 0 < p < 1
 * @returns q with `studentizedRangeUpperTail(q, means, df)` = p
 * @throws DomainError naming the argument
 */
export function studentizedRangeUpperQuantile(p: number, means: number, df: number): number {
  requireOpenProbability("p", p);
  requireMeans(means);
  requireDegreesOfFreedom("df", df);
  if (means === 2) return Math.SQRT2 * tUpperQuantile(p / 2, df);
  // between that of one pair and Bonferroni's for all pairs
  const start = Math.log(Math.SQRT2 * tUpperQuantile(Math.min(0.5, p / (means * (means - 1))), df));
  const target = Math.log(p);
  const lowest = p > 0.9;
  const logQuantile = increasingRoot(
    (logQ) => {
      const q = Math.exp(logQ);
      if (lowest) return Math.log(studentizedRangeLowerTail(q, means, df)) - Math.log1p(-p);
      return target - Math.log(studentizedRangeUpperTail(q, means, df));
    },
    Number.isFinite(start) ? start : 0,
    0.1,
  );
  return Math.exp(logQuantile);
}
