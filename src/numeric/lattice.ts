/** Randomly shifted lattice rules: quasi-random means over the unit cube with an error that the shifts themselves show. */
import { silentWatch, type Watch } from "../host/index.ts";
import { latticeRules } from "./lattice-vectors.ts";
import { randomStream } from "./random-stream.ts";

/** Independent shifts; their scatter is the error. */
const shifts = 8;
/** Student's t with 7 df exceeds this with probability 0.0025 on each side: the error below is one that about 1 in 100 computations passes (rules that look good are preferred). */
const errorFactor = 4.03;

export interface LatticeMean {
  readonly value: number;
  /** 4 standard errors of the mean over the shifts. */
  readonly error: number;
  readonly evaluations: number;
}

export interface LatticeTask {
  readonly dimensions: number;
  /** At a point of the open unit cube. The array is reused. */
  readonly integrand: (point: Float64Array) => number;
  readonly seed: number;
  /** Told before each rule, which replaces the one before: for integrands that keep what they saw. */
  readonly restart?: () => void;
  /** The error asked of a mean of about this value. Rules that will hardly reach it are left out. */
  readonly allowedError: (value: number) => number;
  /** No rule with more evaluations than this is begun. */
  readonly mostEvaluations: number;
  readonly watch?: Watch | undefined;
}

/**
 * Mean of a function over the unit cube by larger and larger lattices, each with 8 random shifts and folded at 1/2 (tent map, for integrands
 * that are not periodic), until the error suffices. The same seed gives the same value, whatever ran before.
 *
 * @source Cranley & Patterson (1976) for the shifts; Hickernell (2002) for the fold
 */
export function latticeMean(task: LatticeTask): LatticeMean {
  const { dimensions, integrand, seed, allowedError, mostEvaluations, watch = silentWatch } = task;
  const point = new Float64Array(dimensions);
  const place = new Float64Array(dimensions);
  const stride = new Float64Array(dimensions);
  let evaluations = 0;
  let best: LatticeMean | null = null;
  let nextCheck = 0;
  let pointsNeeded = 0;
  let bestPoints = 1;
  for (const [number, rule] of latticeRules.entries()) {
    const { points, vector } = rule;
    if (best !== null && evaluations + points * shifts > mostEvaluations) break;
    // the error falls about like 1 / points; a rule with less than 0.8 of the points that this takes is skipped, unless it is the last affordable one
    const following = latticeRules[number + 1];
    if (points < pointsNeeded && following !== undefined && evaluations + following.points * shifts <= mostEvaluations)
      continue;
    task.restart?.();
    const stream = randomStream(seed, "lattice shifts", number);
    for (let d = 0; d < dimensions; d++)
      stride[d] = d < vector.length ? vector[d]! / points : richtmyer(d - vector.length);
    let mean = 0;
    let squares = 0;
    for (let shift = 1; shift <= shifts; shift++) {
      for (let d = 0; d < dimensions; d++) place[d] = stream.uniform();
      let sum = 0;
      for (let k = 0; k < points; k++) {
        for (let d = 0; d < dimensions; d++) {
          const x = place[d]!;
          // folded; kept off 0 and 1
          const folded = 1 - Math.abs(2 * x - 1);
          point[d] = folded < 1e-16 ? 1e-16 : Math.min(folded, 0.9999999999999998);
          const next = x + stride[d]!;
          place[d] = next >= 1 ? next - 1 : next;
        }
        sum += integrand(point);
        if (++evaluations >= nextCheck) {
          watch.checkpoint();
          nextCheck = evaluations + 500;
        }
      }
      const value = sum / points;
      const difference = value - mean;
      mean += difference / shift;
      squares += difference * (value - mean);
    }
    const scatter = errorFactor * Math.sqrt(squares / (shifts * (shifts - 1)));
    // so many times the points hardly do better than that power: a scatter below is luck, and would stop the search too early
    const error: number = best === null ? scatter : Math.max(scatter, best.error * (bestPoints / points) ** 1.32);
    // rules are independent; the larger ones are so much better that the last alone counts
    best = { value: mean, error, evaluations };
    bestPoints = points;
    const allowed = allowedError(mean);
    if (error <= allowed) break;
    pointsNeeded = 0.8 * points * Math.min(32, error / allowed);
  }
  return best!;
}

/** Fractional parts of square roots of primes, for coordinates beyond those of the vectors. */
function richtmyer(index: number): number {
  let found = 0;
  for (let n = 2; ; n++) {
    let prime = true;
    for (let d = 2; d * d <= n; d++) if (n % d === 0) prime = false;
    if (prime && found++ === index) return Math.sqrt(n) % 1;
  }
}
