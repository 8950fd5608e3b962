/** Critical values of joint tests: the limit that the largest of several statistics reaches with a given probability. */
import type { Watch } from "../host/index.ts";
import { requireDegreesOfFreedom, requireOpenProbability } from "./argument-checks.ts";
import { type Matrix, semidefiniteFactor } from "./dense-linear-algebra.ts";
import { unionTailByLattice } from "./directional-lattice.ts";
import { lengthTail } from "./directional-tail.ts";
import { DomainError } from "./domain-error.ts";
import { commonLimit } from "./dunnett.ts";
import { increasingRoot } from "./monotone-root.ts";
import {
  balancedPairs,
  type JointMethod,
  multivariateTProbability,
  multivariateTUpperTail,
  requireCorrelation,
} from "./multivariate-t.ts";
import { productLoadings, productTail, type Sides } from "./product-structure.ts";
import { piecewiseTail } from "./scale-mixture.ts";
import { studentizedRangeUpperQuantile } from "./studentized-range.ts";
import { tUpperQuantile } from "./t.ts";

export interface EquicoordinateInput {
  /** Probability that some statistic reaches the limit, 0 < p < 1. */
  readonly p: number;
  readonly correlation: Matrix;
  /** Of the common standard error; Infinity for normal statistics. */
  readonly df: number;
  readonly sides?: Sides | undefined;
  /** Asked absolute error of the limit where a lattice is needed, default 5e-5. */
  readonly absoluteError?: number | undefined;
  readonly seed?: number | undefined;
  readonly mostEvaluations?: number | undefined;
  readonly watch?: Watch | undefined;
}

export interface EquicoordinateQuantile {
  readonly value: number;
  /** Absolute error of the value. */
  readonly error: number;
  readonly method: JointMethod;
}

/**
 * The common limit that at least one of several t statistics reaches with probability p.
 *
 * By root search on the tail where that is deterministic. On a lattice one sample serves all limits: directions drawn for a first guess, the weights
 * kept, the tail at another limit is the same sum with another length tail, smooth in the limit.
 *
 * @returns the limit and its error
 * @throws DomainError naming the argument
 */
export function equicoordinateQuantile(input: EquicoordinateInput): EquicoordinateQuantile {
  const {
    p,
    correlation,
    df,
    sides = "two-sided",
    absoluteError = 5e-5,
    seed = 1,
    mostEvaluations = 6e5,
    watch,
  } = input;
  requireOpenProbability("p", p);
  requireCorrelation("correlation", correlation);
  requireDegreesOfFreedom("df", df);
  if (sides !== "two-sided" && sides !== "upper") throw new DomainError("sides", sides, "two-sided or upper");
  const count = correlation.length;
  const twoSided = sides === "two-sided";
  const exact = (value: number, method: JointMethod): EquicoordinateQuantile => ({
    value,
    error: 1e-11 * Math.abs(value),
    method,
  });
  const single = tUpperQuantile(twoSided ? p / 2 : p, df);
  if (count === 1) return exact(single, "one variable");
  const loadings = productLoadings(correlation);
  if (loadings !== null) {
    const tail = piecewiseTail(productTail(loadings, sides), 0.25, 37.5);
    return exact(commonLimit(tail, count, twoSided, p, df), "product correlation, quadrature");
  }
  const means = twoSided && count > 2 ? balancedPairs(correlation) : null;
  if (means !== null) return exact(studentizedRangeUpperQuantile(p, means, df) / Math.SQRT2, "studentized range");
  const bonferroni = tUpperQuantile((twoSided ? 0.5 : 1) * (p / count), df);
  const { factor, rank } = semidefiniteFactor(correlation, 1e-11);
  const target = Math.log(p);
  if (rank <= 3 && single > 0) {
    let method: JointMethod = "directions, quadrature";
    const value = Math.exp(
      increasingRoot(
        (logLimit) => {
          const tail = multivariateTUpperTail({ limit: Math.exp(logLimit), correlation, df, sides, watch });
          method = tail.method;
          return target - Math.log(tail.probability);
        },
        Math.log((single + bonferroni) / 2),
        0.05,
      ),
    );
    return exact(value, method);
  }
  // see multivariateTUpperTail: conditioning where the tail is not small
  if (!(single > 0) || p > 0.02) return limitByConditioning(input, single, bonferroni);
  // drawn at Bonferroni's limit, a little wide of the answer: weights stay bounded on both sides of it
  const rows: number[][] = [];
  for (const row of factor) {
    rows.push(row.map((value) => value / bonferroni));
    if (twoSided) rows.push(row.map((value) => -value / bonferroni));
  }
  // density of the limit at the answer is about p times the steepness of log p
  const steepness = Math.max(0.5, (df * bonferroni) / (df + bonferroni * bonferroni));
  const sample = unionTailByLattice(
    {
      rows,
      rank,
      df,
      seed,
      allowedError: (probability) => 0.7 * absoluteError * steepness * probability,
      mostEvaluations: mostEvaluations / 2,
      watch,
    },
    true,
  );
  const tail = lengthTail(rank, df);
  const { largest, weights } = sample;
  const tailAt = (limit: number): number => {
    let sum = 0;
    for (let i = 0; i < largest.length; i++) sum += weights[i]! * tail(limit / (bonferroni * largest[i]!));
    return sum / largest.length;
  };
  const logLimit = increasingRoot(
    (x) => target - Math.log(tailAt(Math.exp(x))),
    Math.log((single + bonferroni) / 2),
    0.02,
  );
  const value = Math.exp(logLimit);
  const slope = (Math.log(tailAt(value * 1.001)) - Math.log(tailAt(value / 1.001))) / (value * (1.001 - 1 / 1.001));
  return { value, error: sample.error / sample.probability / Math.abs(slope), method: "directions, lattice" };
}

/** Root search on a small lattice, then Newton's steps on one that is large enough. */
function limitByConditioning(input: EquicoordinateInput, single: number, bonferroni: number): EquicoordinateQuantile {
  const {
    p,
    correlation,
    df,
    sides = "two-sided",
    absoluteError = 5e-5,
    seed = 1,
    mostEvaluations = 6e5,
    watch,
  } = input;
  const count = correlation.length;
  const inside = (limit: number, error: number, most: number) =>
    multivariateTProbability({
      lower: new Array<number>(count).fill(sides === "two-sided" ? -limit : -Infinity),
      upper: new Array<number>(count).fill(limit),
      correlation,
      df,
      absoluteError: error,
      seed,
      mostEvaluations: most,
      watch,
    });
  const rough = (limit: number) => inside(limit, 1e-3, 20000).probability - (1 - p);
  let value = increasingRoot(
    rough,
    (single + bonferroni) / 2,
    (bonferroni - single) / 4 + 1e-3,
    sides === "two-sided" ? 0 : -Infinity,
  );
  // the density of the limit, from the same lattice on both sides
  const distance = 0.01 * Math.max(0.1, Math.abs(value));
  const slope = Math.max(1e-12, (rough(value + distance) - rough(value - distance)) / (2 * distance));
  let method: JointMethod = "lattice";
  let error = Infinity;
  for (let step = 0; step < 3; step++) {
    const found = inside(value, 0.7 * absoluteError * slope, mostEvaluations);
    const change = (1 - p - found.probability) / slope;
    method = found.method;
    // what the step leaves: the error of the lattice, and that of the slope
    error = found.error / slope + 0.05 * Math.abs(change);
    value += change;
    if (Math.abs(change) < 0.5 * absoluteError) break;
  }
  return { value, error, method };
}
