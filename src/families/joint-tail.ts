import {
  dunnettUpperQuantile,
  dunnettUpperTail,
  equicoordinateQuantile,
  fUpperTail,
  gaussLegendre,
  multivariateTUpperTail,
  normalQuantile,
} from "../numeric/index.ts";
import type { Watch } from "../host/index.ts";

/** A set of statistics with one variance estimate and the limit that the largest of them is to reach. */
export interface JointTailProblem {
  readonly correlation: readonly (readonly number[])[];
  /** df of the variance estimate; Infinity for normal variables. */
  readonly df: number;
  readonly sides: "two-sided" | "upper";
  readonly limit: number;
  readonly watch: Watch;
  /** Where no plain quadrature is possible: fewer nodes, for decisions that are not close (the error says how close). */
  readonly roughly?: boolean;
}

export interface JointTail {
  readonly p: number;
  /** Estimated absolute error of p; about 1e-12 where the structure allows plain quadrature. */
  readonly error: number;
}

/**
 * P(the largest of several correlated t statistics reaches `limit`), all from one variance estimate.
 *
 * - Correlations b_i b_j (comparisons with one control, equicorrelated, uncorrelated): many-to-one tails of the numeric room.
 * - otherwise by directions (Somerville 1998): the largest statistic is the length of a t vector times the support function of its direction,
 *   and length and direction are independent. Rank 2: Gauss-Legendre between the kinks; rank 3: the numeric room's quadrature, or a rough one of
 *   our own; higher rank: shifted lattices of directions, quicker and less close than the numeric room's.
 *
 * @source dunnett-1955, somerville-1998
 */
export function jointUpperTail(problem: JointTailProblem): JointTail {
  const { correlation, df, sides, limit } = problem;
  const product = productForm(correlation);
  if (product !== null) return { p: dunnettUpperTail({ loadings: product, value: limit, df, sides }), error: 1e-12 };
  const factor = pivotedCholesky(correlation);
  const rank = factor[0]!.length;
  if (rank === 2) return { p: circleTail(factor, df, sides, limit), error: 1e-11 };
  if (rank === 3) {
    if (problem.roughly === true)
      return { p: ballTail(factor, df, sides, limit, roughHeights, problem.watch), error: 1e-3 };
    const { probability, error } = multivariateTUpperTail({ correlation, df, sides, limit, watch: problem.watch });
    return { p: probability, error };
  }
  return sphereTail(factor, df, sides, limit, problem.watch);
}

/** The limit that the largest statistic reaches with probability `p`. */
export function jointCritical(p: number, problem: Omit<JointTailProblem, "limit">): number {
  const product = productForm(problem.correlation);
  if (product !== null) return dunnettUpperQuantile({ loadings: product, p, df: problem.df, sides: problem.sides });
  if (pivotedCholesky(problem.correlation)[0]!.length === 3) return equicoordinateQuantile({ ...problem, p }).value;
  return rootOf(
    (limit) => {
      problem.watch.checkpoint();
      return Math.log(jointUpperTail({ ...problem, limit }).p / p);
    },
    problem.sides === "upper" ? -6 : 1e-3,
    4,
  );
}

/** Where a falling function crosses zero: bracketed secant steps with halving at a stuck end (Illinois method). */
function rootOf(excess: (x: number) => number, from: number, to: number): number {
  let [low, high] = [from, to];
  let [atLow, atHigh] = [excess(low), excess(high)];
  while (atHigh > 0) {
    [low, atLow] = [high, atHigh];
    high *= 1.6;
    atHigh = excess(high);
  }
  let stuck = 0;
  for (let step = 0; step < 80 && high - low > 1e-12 * Math.abs(high); step++) {
    const next = Number.isFinite(atHigh) ? (low * atHigh - high * atLow) / (atHigh - atLow) : (low + high) / 2;
    const at = excess(next);
    if (Math.abs(at) < 1e-13) return next;
    if (at > 0) {
      [low, atLow] = [next, at];
      if (stuck > 0) atHigh /= 2;
      stuck = 1;
    } else {
      [high, atHigh] = [next, at];
      if (stuck < 0) atLow /= 2;
      stuck = -1;
    }
  }
  return (low + high) / 2;
}

/** Above this share of common variance two rows are so close that the set is left to the methods by rank. */
const mostCommon = 0.98;

/** b with correlation_ij = b_i b_j for i != j, |b_i| <= 1; null when there is none. */
function productForm(correlation: readonly (readonly number[])[]): readonly number[] | null {
  const count = correlation.length;
  const at = (i: number, j: number) => correlation[i]![j]!;
  if (count === 1) return [0];
  let b: number[];
  if (count === 2) {
    const root = Math.sqrt(Math.abs(at(0, 1)));
    b = [root, at(0, 1) < 0 ? -root : root];
  } else {
    // The strongest row fixes the scale; rows that are uncorrelated with all have b = 0.
    b = new Array<number>(count).fill(0);
    let best: readonly [number, number, number] | null = null;
    let most = 1e-12;
    for (let i = 0; i < count; i++)
      for (let j = 0; j < count; j++)
        for (let k = j + 1; k < count; k++) {
          if (i === j || i === k) continue;
          const size = Math.min(Math.abs(at(i, j)), Math.abs(at(i, k)), Math.abs(at(j, k)));
          if (size > most) [best, most] = [[i, j, k], size];
        }
    if (best === null) {
      // No triangle: at most one correlated pair may remain.
      for (let i = 0; i < count; i++)
        for (let j = i + 1; j < count; j++)
          if (Math.abs(at(i, j)) > 1e-12) {
            if (b.some((value) => value !== 0)) return null;
            b[i] = Math.sqrt(Math.abs(at(i, j)));
            b[j] = Math.sign(at(i, j)) * b[i]!;
          }
    } else {
      const [i, j, k] = best;
      const square = (at(i, j) * at(i, k)) / at(j, k);
      if (!(square > 0)) return null;
      b[i] = Math.sqrt(square);
      for (let l = 0; l < count; l++) if (l !== i) b[l] = at(i, l) / b[i]!;
    }
  }
  for (let i = 0; i < count; i++) {
    for (let j = 0; j < i; j++) if (Math.abs(at(i, j) - b[i]! * b[j]!) > 1e-12) return null;
  }
  return b.every((value) => value * value < mostCommon) ? b : null;
}

/** A with A A' = correlation, as many columns as its rank. */
function pivotedCholesky(correlation: readonly (readonly number[])[]): number[][] {
  const count = correlation.length;
  const left = correlation.map((row) => [...row]);
  const factor: number[][] = correlation.map(() => []);
  for (let rank = 0; rank < count; rank++) {
    let pivot = 0;
    for (let i = 0; i < count; i++) if (left[i]![i]! > left[pivot]![pivot]!) pivot = i;
    const size = left[pivot]![pivot]!;
    if (size < 1e-10) break;
    const column = left.map((row) => row[pivot]! / Math.sqrt(size));
    for (let i = 0; i < count; i++) {
      factor[i]!.push(column[i]!);
      for (let j = 0; j < count; j++) left[i]![j]! -= column[i]! * column[j]!;
    }
  }
  return factor;
}

/**
 * Probability along a direction whose longest row has length `h`: that the t vector is so long that the row reaches the limit. A limit below zero is
 * missed only where every row points backwards, and the vector is long.
 */
function radialTail(h: number, rank: number, df: number, limit: number): number {
  const beyond = (length: number) => (length <= 0 ? 0 : fUpperTail((limit / length) ** 2 / rank, rank, df));
  return limit >= 0 ? beyond(h) : 1 - beyond(-h);
}

type Nodes = readonly { readonly x: number; readonly weight: number }[];
const legendre = (count: number): Nodes => {
  const { nodes, weights } = gaussLegendre(count);
  return Array.from(nodes, (x, i) => ({ x, weight: weights[i]! }));
};
const arcNodes = legendre(32);
const ringNodes = legendre(12);
const roughHeights = legendre(12);

/** Rank 2: each row is the largest over one arc; the arcs end where two rows are equally long along the direction. */
function circleTail(
  factor: readonly (readonly number[])[],
  df: number,
  sides: "two-sided" | "upper",
  limit: number,
): number {
  const rows = sides === "two-sided" ? [...factor, ...factor.map((row) => row.map((value) => -value))] : factor;
  const longest = (angle: number) =>
    rows.reduce(
      (most, row) => Math.max(most, row[0]! * Math.cos(angle) + row[1]! * Math.sin(angle)),
      Number.NEGATIVE_INFINITY,
    );
  const turn = 2 * Math.PI;
  const ends = new Set<number>([0, turn]);
  const add = (angle: number) => ends.add(((angle % turn) + turn) % turn);
  for (const [i, a] of rows.entries()) {
    const direction = Math.atan2(a[1]!, a[0]!);
    for (const quarter of [0, 0.5, -0.5]) add(direction + quarter * Math.PI);
    for (const b of rows.slice(0, i)) {
      const across = Math.atan2(a[1]! - b[1]!, a[0]! - b[0]!) + Math.PI / 2;
      add(across);
      add(across + Math.PI);
    }
  }
  const sorted = [...ends].sort((x, y) => x - y);
  let total = 0;
  for (let k = 1; k < sorted.length; k++) {
    const [from, to] = [sorted[k - 1]!, sorted[k]!];
    if (to - from < 1e-14) continue;
    const [middle, half] = [(from + to) / 2, (to - from) / 2];
    for (const { x, weight } of arcNodes) total += weight * half * radialTail(longest(middle + half * x), 2, df, limit);
  }
  return total / turn;
}

/**
 * Rank 3: rings of equal height on the sphere (heights are uniform: Archimedes), each ring cut where the longest row changes. The kinks left in
 * the height are weak, so that a dozen rings are within 1e-3.
 */
function ballTail(
  factor: readonly (readonly number[])[],
  df: number,
  sides: "two-sided" | "upper",
  limit: number,
  heights: Nodes,
  watch: Watch,
): number {
  const rows = sides === "two-sided" ? [...factor, ...factor.map((row) => row.map((value) => -value))] : [...factor];
  const tail = radialTable(3, df, limit);
  const turn = 2 * Math.PI;
  // Where no row is longer than zero the limit is never reached: zero is one more row.
  const candidates = sides === "two-sided" || limit < 0 ? rows : [...rows, [0, 0, 0]];
  const pairs = candidates.flatMap((a, i) =>
    candidates.slice(0, i).map((b) => {
      const [x, y, z] = [a[0]! - b[0]!, a[1]! - b[1]!, a[2]! - b[2]!];
      return { size: Math.hypot(x, y), angle: Math.atan2(y, x), z };
    }),
  );
  let total = 0;
  for (const { x: node, weight } of heights) {
    watch.checkpoint();
    // A two-sided tail is the same above and below the equator.
    const height = sides === "two-sided" ? (node + 1) / 2 : node;
    const radius = Math.sqrt(1 - height * height);
    const cuts = [0, turn];
    for (const { size, angle, z } of pairs) {
      const cosine = (-z * height) / (radius * size);
      if (!(Math.abs(cosine) < 1)) continue;
      const half = Math.acos(cosine);
      for (const cut of [angle + half, angle - half]) cuts.push(((cut % turn) + turn) % turn);
    }
    cuts.sort((a, b) => a - b);
    const longestAt = (angle: number) => {
      const [c, s] = [radius * Math.cos(angle), radius * Math.sin(angle)];
      let [best, most] = [0, Number.NEGATIVE_INFINITY];
      for (let i = 0; i < candidates.length; i++) {
        const along = candidates[i]![0]! * c + candidates[i]![1]! * s + candidates[i]![2]! * height;
        if (along > most) [best, most] = [i, along];
      }
      return best;
    };
    let from = 0;
    let owner = longestAt(cuts[1]! / 2);
    let ring = 0;
    const close = (to: number) => {
      const row = candidates[owner]!;
      const [middle, half] = [(from + to) / 2, (to - from) / 2];
      for (const { x, weight: w } of ringNodes) {
        const angle = middle + half * x;
        const along = radius * (row[0]! * Math.cos(angle) + row[1]! * Math.sin(angle)) + row[2]! * height;
        ring += w * half * tail(along);
      }
    };
    for (let k = 1; k < cuts.length; k++) {
      const next = k + 1 < cuts.length ? longestAt((cuts[k]! + cuts[k + 1]!) / 2) : -1;
      if (next === owner) continue;
      close(cuts[k]!);
      from = cuts[k]!;
      owner = next;
    }
    total += (weight * ring) / (2 * turn);
  }
  return Math.min(1, total);
}

/** Korobov's multiplier for the lattice below: a primitive-root-like choice, checked by the error estimate of every call. */
const latticeSize = 8191;
const latticeMultiplier = 1858;
const latticeShifts = 8;
/** Fractional parts of square roots of primes (Richtmyer): the shifts of the lattices. */
const shiftRoots = [2, 3, 5, 7, 11, 13, 17, 19, 23, 29, 31, 37, 41, 43, 47, 53, 59, 61, 67, 71].map(Math.sqrt);

/** Values of the radial tail on an even grid in h, read by cubic interpolation: it is called for every direction. */
function radialTable(rank: number, df: number, limit: number): (h: number) => number {
  const cells = 400;
  const sign = limit < 0 ? -1 : 1;
  const values = Float64Array.from({ length: cells + 4 }, (_, k) =>
    radialTail((sign * (k - 1)) / cells, rank, df, limit),
  );
  return (h) => {
    if (h * sign <= 0) return values[1]!;
    const place = Math.min(cells - 1e-9, h * sign * cells);
    const k = Math.floor(place);
    const t = place - k;
    const [a, b, c, d] = [values[k]!, values[k + 1]!, values[k + 2]!, values[k + 3]!];
    // Lagrange's cubic through the four points around.
    return (
      (-t * (t - 1) * (t - 2) * a) / 6 +
      ((t + 1) * (t - 1) * (t - 2) * b) / 2 -
      ((t + 1) * t * (t - 2) * c) / 2 +
      ((t + 1) * t * (t - 1) * d) / 6
    );
  };
}

/** Directions from shifted lattices turned into normal vectors; the spread over the shifts is the error estimate. */
function sphereTail(
  factor: readonly (readonly number[])[],
  df: number,
  sides: "two-sided" | "upper",
  limit: number,
  watch: Watch,
): JointTail {
  const count = factor.length;
  const rank = factor[0]!.length;
  const flat = Float64Array.from(factor.flat());
  const tail = radialTable(rank, df, limit);
  const generators: number[] = [1];
  for (let k = 1; k < rank; k++) generators.push((generators[k - 1]! * latticeMultiplier) % latticeSize);
  const direction = new Float64Array(rank);
  const sums: number[] = [];
  for (let shift = 0; shift < latticeShifts; shift++) {
    watch.checkpoint();
    let sum = 0;
    for (let point = 0; point < latticeSize; point++) {
      let square = 0;
      for (let k = 0; k < rank; k++) {
        const raw =
          (point * generators[k]!) / latticeSize +
          (shift + 1) * shiftRoots[k % shiftRoots.length]! * (1 + Math.floor(k / shiftRoots.length));
        const u = raw - Math.floor(raw);
        // The baker's fold makes the integrand periodic.
        const value = normalQuantile(Math.min(1 - 1e-16, Math.max(1e-16, 1 - Math.abs(2 * u - 1))));
        direction[k] = value;
        square += value * value;
      }
      const length = Math.sqrt(square);
      let [most, least] = [Number.NEGATIVE_INFINITY, Number.POSITIVE_INFINITY];
      for (let i = 0; i < count; i++) {
        let along = 0;
        for (let k = 0; k < rank; k++) along += flat[i * rank + k]! * direction[k]!;
        if (along > most) most = along;
        if (along < least) least = along;
      }
      // A direction and its opposite are equally likely.
      sum +=
        sides === "two-sided"
          ? tail(Math.max(most, -least) / length)
          : (tail(most / length) + tail(-least / length)) / 2;
    }
    sums.push(sum / latticeSize);
  }
  const p = sums.reduce((a, b) => a + b, 0) / latticeShifts;
  const variance = sums.reduce((a, b) => a + (b - p) ** 2, 0) / (latticeShifts * (latticeShifts - 1));
  return { p: Math.max(0, Math.min(1, p)), error: 3 * Math.sqrt(variance) + 1e-9 };
}
