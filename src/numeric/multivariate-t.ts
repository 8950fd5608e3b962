/** Joint probabilities of t (and normal) statistics with any correlation: which route serves which structure. */
import type { Watch } from "../host/index.ts";
import { requireDegreesOfFreedom } from "./argument-checks.ts";
import { type Matrix, requireSymmetric, semidefiniteFactor } from "./dense-linear-algebra.ts";
import { unionTailByLattice } from "./directional-lattice.ts";
import { type HalfSpaces, unionTailOnCircle, unionTailOnSphere } from "./directional-tail.ts";
import { DomainError } from "./domain-error.ts";
import { productLoadings, productTail, type Sides } from "./product-structure.ts";
import { rectangleByQuadrature } from "./rectangle-quadrature.ts";
import { latticeMean } from "./lattice.ts";
import { rectangleIntegrand, sequentialRectangle } from "./rectangle-lattice.ts";
import { meanOverScale } from "./scale-mixture.ts";
import { studentizedRangeUpperTail } from "./studentized-range.ts";
import { tUpperTail } from "./t.ts";

/** How a joint probability was computed. */
export type JointMethod =
  | "one variable"
  | "product correlation, quadrature"
  | "studentized range"
  | "quadrature"
  | "directions, quadrature"
  | "directions, lattice"
  | "lattice";

export interface JointProbability {
  readonly probability: number;
  /** Absolute error: 4 standard errors of a lattice, or a bound that the tests of the room have confirmed for quadratures. */
  readonly error: number;
  readonly method: JointMethod;
}

export interface UpperTailInput {
  /** What the statistics are held against: one value for all, or one each. */
  readonly limit: number | readonly number[];
  /** Correlation of the statistics, positive semidefinite, also singular. */
  readonly correlation: Matrix;
  /** Of the common standard error; Infinity for normal statistics. */
  readonly df: number;
  /** "two-sided": some |statistic| >= its limit; "upper": some statistic >= its limit. Default "two-sided". */
  readonly sides?: Sides | undefined;
  /** Asked absolute error where a lattice is needed; default 1e-6. */
  readonly absoluteError?: number | undefined;
  /** Asked error as a part of the probability; default 1e-3. Both must be met. */
  readonly relativeError?: number | undefined;
  /** Seed of the lattice shifts; the same seed gives the same answer. Default 1. */
  readonly seed?: number | undefined;
  /** Most evaluations on a lattice, default 600,000; what was reached by then is reported. */
  readonly mostEvaluations?: number | undefined;
  readonly watch?: Watch | undefined;
}

const quadratureError = 1e-12;
const defaultMost = 6e5;
/** Below this bound on the tail, directions are the more accurate lattice (measured; see README), above it conditioning. */
const smallTail = 0.03;

/** Checks a correlation matrix: symmetric, ones on the diagonal, entries from -1 to 1. */
export function requireCorrelation(argument: string, correlation: Matrix): void {
  requireSymmetric(argument, correlation);
  if (correlation.length === 0) throw new DomainError(argument, "0 x 0", "at least one statistic");
  for (const [i, row] of correlation.entries()) {
    if (Math.abs(row[i]! - 1) > 1e-9) throw new DomainError(argument, row[i], "ones on the diagonal");
    for (const value of row)
      if (!(Math.abs(value) <= 1 + 1e-9)) throw new DomainError(argument, value, "entries from -1 to 1");
  }
}

/** The number of groups whose all pairwise differences, equally precise, have this correlation; null for another structure. */
export function balancedPairs(correlation: Matrix): number | null {
  const pairs = correlation.length;
  const means = Math.round((1 + Math.sqrt(1 + 8 * pairs)) / 2);
  if (pairs < 3 || (means * (means - 1)) / 2 !== pairs) return null;
  // every entry 0 or +-1/2, each row with 2 (means - 2) of +-1/2, rank means - 1
  for (const [i, row] of correlation.entries()) {
    let halves = 0;
    for (const [j, value] of row.entries()) {
      if (j === i) continue;
      if (Math.abs(Math.abs(value) - 0.5) < 1e-12) halves++;
      else if (Math.abs(value) > 1e-12) return null;
    }
    if (halves !== 2 * (means - 2)) return null;
  }
  try {
    return semidefiniteFactor(correlation, 1e-11).rank === means - 1 ? means : null;
  } catch {
    return null;
  }
}

/** Rows over limits, both signs where two-sided, statistics that are the same as another with a limit no higher left out. */
function halfSpacesOf(factor: Matrix, limits: readonly number[], sides: Sides): HalfSpaces {
  const rows: number[][] = [];
  for (const [i, row] of factor.entries()) {
    if (limits[i] === Infinity) continue;
    const scaled = row.map((value) => value / limits[i]!);
    rows.push(scaled);
    if (sides === "two-sided") rows.push(scaled.map((value) => -value));
  }
  // longest first: of parallel rows the longest decides
  rows.sort((a, b) => Math.hypot(...b) - Math.hypot(...a));
  const kept: number[][] = [];
  for (const row of rows) {
    const size = Math.hypot(...row);
    const same = kept.some((other) => {
      const otherSize = Math.hypot(...other);
      return row.every((value, k) => Math.abs(value / size - other[k]! / otherSize) < 1e-12);
    });
    if (!same) kept.push(row);
  }
  return kept;
}

/**
 * Probability that at least one of several t statistics with a common standard error reaches its limit: adjusted p of a single-step joint test.
 * Small tails keep their relative accuracy.
 *
 * One statistic: t. Product correlations: quadrature over the common part. All pairs of equally precise means: studentized range.
 * Rank 2 and 3: quadrature over directions. Otherwise a lattice, its error reported: over directions drawn in the tail where it is small, by
 * conditioning one statistic after the other (1 less the probability of none) where it is not.
 *
 * @throws DomainError naming the argument
 * @source Genz & Bretz (2002, 2009) for the problem; see the functions for the routes
 */
export function multivariateTUpperTail(input: UpperTailInput): JointProbability {
  const {
    correlation,
    df,
    sides = "two-sided",
    absoluteError = 1e-6,
    relativeError = 1e-3,
    seed = 1,
    mostEvaluations = defaultMost,
    watch,
  } = input;
  requireCorrelation("correlation", correlation);
  requireDegreesOfFreedom("df", df);
  if (sides !== "two-sided" && sides !== "upper") throw new DomainError("sides", sides, "two-sided or upper");
  const count = correlation.length;
  const limits = typeof input.limit === "number" ? new Array<number>(count).fill(input.limit) : input.limit;
  if (limits.length !== count) throw new DomainError("limit", `${limits.length} values`, `one value, or ${count}`);
  for (const limit of limits) if (Number.isNaN(limit)) throw new DomainError("limit", limit, "a number");
  const exact = (probability: number, method: JointMethod): JointProbability => {
    const kept = Math.min(1, Math.max(0, probability));
    return { probability: kept, error: quadratureError * kept, method };
  };
  const least = Math.min(...limits);
  if (least === Infinity) return exact(0, "one variable");
  if (least === -Infinity || (sides === "two-sided" && least <= 0)) return exact(1, "one variable");
  if (count === 1) {
    const tail = tUpperTail(least, df);
    return exact(sides === "two-sided" ? 2 * tail : tail, "one variable");
  }
  const common = limits.every((limit) => limit === least);
  if (common) {
    const loadings = productLoadings(correlation);
    if (loadings !== null)
      return exact(meanOverScale(productTail(loadings, sides), least, df), "product correlation, quadrature");
    const means = sides === "two-sided" && count > 2 ? balancedPairs(correlation) : null;
    if (means !== null) return exact(studentizedRangeUpperTail(Math.SQRT2 * least, means, df), "studentized range");
  }
  const { factor, rank } = semidefiniteFactor(correlation, 1e-11);
  if (least > 0) {
    const rows = halfSpacesOf(factor, limits, sides);
    if (rank === 1) {
      // all statistics are the same, up to their sign
      const signed = (sign: number) => Math.max(0, ...rows.map((row) => sign * row[0]!));
      const tailAt = (along: number) => (along > 0 ? tUpperTail(1 / along, df) : 0);
      return exact(tailAt(signed(1)) + tailAt(signed(-1)), "one variable");
    }
    if (rank === 2) return exact(unionTailOnCircle(rows, df), "directions, quadrature");
    if (rank === 3) return exact(unionTailOnSphere(rows, df), "directions, quadrature");
    // the tails of all half-spaces together bound the probability
    const bound = rows.reduce((sum, row) => sum + tUpperTail(1 / Math.hypot(...row), df), 0);
    if (bound <= smallTail) {
      const sample = unionTailByLattice({
        rows,
        rank,
        df,
        seed,
        allowedError: (probability) => Math.min(absoluteError, relativeError * probability),
        mostEvaluations: mostEvaluations / 2,
        watch,
      });
      return { probability: Math.min(1, sample.probability), error: sample.error, method: "directions, lattice" };
    }
  }
  const allowed = Math.min(absoluteError, relativeError * 0.01);
  const inside = multivariateTProbability({
    lower: limits.map((limit) => (sides === "two-sided" ? -limit : -Infinity)),
    upper: limits,
    correlation,
    df,
    absoluteError: allowed,
    seed,
    mostEvaluations,
    watch,
  });
  return { probability: 1 - inside.probability, error: inside.error, method: inside.method };
}

export interface RectangleInput {
  /** One each; -Infinity for none. */
  readonly lower: readonly number[];
  /** One each, >= lower; Infinity for none. */
  readonly upper: readonly number[];
  readonly correlation: Matrix;
  /** Of the common standard error; Infinity for normal variables. */
  readonly df: number;
  /** Shift of each variable before it is divided by the common deviation: T = (Z + mean) / S (Kshirsagar 1961). Default 0. */
  readonly means?: readonly number[] | undefined;
  /** Asked absolute error, default 1e-6. */
  readonly absoluteError?: number | undefined;
  /** Default 1. */
  readonly seed?: number | undefined;
  /** Default 600,000. */
  readonly mostEvaluations?: number | undefined;
  readonly watch?: Watch | undefined;
}

/**
 * Probability that jointly t variables all lie between their limits: T = (Z + mean) / S with Z normal of the given correlation (any positive
 * semidefinite one) and S^2 chi-square over df, common to all.
 *
 * Deterministic quadrature for one or two variables, product correlations, rank 2, and three variables; otherwise sequential conditioning on a
 * randomly shifted lattice, most restrictive variable first, with its error.
 *
 * @throws DomainError naming the argument
 * @source Genz (1992), Genz & Bretz (2002), with the order of Gibson, Glasbey & Elston (1994) and singular matrices as in Genz & Kwong (2000)
 */
export function multivariateTProbability(input: RectangleInput): JointProbability {
  const { lower, upper, correlation, df, absoluteError = 1e-6, seed = 1, mostEvaluations = defaultMost, watch } = input;
  requireCorrelation("correlation", correlation);
  requireDegreesOfFreedom("df", df);
  const count = correlation.length;
  const means = input.means ?? new Array<number>(count).fill(0);
  for (const [name, list] of [
    ["lower", lower],
    ["upper", upper],
    ["means", means],
  ] as const) {
    if (list.length !== count) throw new DomainError(name, `${list.length} values`, `${count} values`);
    for (const value of list) if (Number.isNaN(value)) throw new DomainError(name, value, "a number");
  }
  for (const mean of means) if (!Number.isFinite(mean)) throw new DomainError("means", mean, "finite numbers");
  for (let i = 0; i < count; i++)
    if (!(lower[i]! <= upper[i]!)) throw new DomainError("lower", lower[i], `<= upper, ${upper[i]}`);
  if (!(absoluteError > 0)) throw new DomainError("absoluteError", absoluteError, "> 0");
  for (let i = 0; i < count; i++) {
    if (lower[i] === upper[i] || lower[i] === Infinity || upper[i] === -Infinity)
      return { probability: 0, error: 0, method: "one variable" };
  }
  // variables without limits say nothing
  const bounded = [...correlation.keys()].filter((i) => lower[i] !== -Infinity || upper[i] !== Infinity);
  if (bounded.length === 0) return { probability: 1, error: 0, method: "one variable" };
  const rectangle = {
    lower: bounded.map((i) => lower[i]!),
    upper: bounded.map((i) => upper[i]!),
    shift: bounded.map((i) => means[i]!),
    correlation: bounded.map((i) => bounded.map((j) => correlation[i]![j]!)),
    df,
  };
  const quadrature = rectangleByQuadrature(rectangle);
  if (quadrature !== null) {
    return { probability: Math.min(1, Math.max(0, quadrature.probability)), error: 1e-10, method: quadrature.method };
  }
  const sequential = sequentialRectangle(rectangle);
  const { dimensions, integrand } = rectangleIntegrand(sequential, df);
  const mean = latticeMean({
    dimensions,
    integrand,
    seed,
    allowedError: () => absoluteError,
    mostEvaluations,
    watch,
  });
  return { probability: Math.min(1, Math.max(0, mean.value)), error: mean.error, method: "lattice" };
}
