/** Simulated studies of four means for the calibration of families: data in, what a family needs out. Invented, no real data. */
import { tTwoSidedTail, tUpperTail } from "../../src/numeric/index.ts";

/** xoshiro128** (Blackman & Vigna 2018), seeded by splitmix32; the calibration's own, so that it does not lean on the core's generator. */
export function generator(seed: number): () => number {
  let mix = seed >>> 0;
  const split = () => {
    mix = (mix + 0x9e3779b9) >>> 0;
    let z = mix;
    z = Math.imul(z ^ (z >>> 16), 0x21f0aaad);
    z = Math.imul(z ^ (z >>> 15), 0x735a2d97);
    return (z ^ (z >>> 15)) >>> 0;
  };
  let [a, b, c, d] = [split(), split(), split(), split()];
  return () => {
    const result = Math.imul(rotate(Math.imul(b, 5), 7), 9) >>> 0;
    const t = b << 9;
    c ^= a;
    d ^= b;
    b ^= c;
    a ^= d;
    c ^= t;
    d = rotate(d, 11);
    return (result + 0.5) / 4294967296;
  };
}
const rotate = (x: number, k: number) => (x << k) | (x >>> (32 - k));

/** Standard normal variates by Marsaglia's polar method. */
export function normals(uniform: () => number): () => number {
  let spare: number | null = null;
  return () => {
    if (spare !== null) {
      const value = spare;
      spare = null;
      return value;
    }
    for (;;) {
      const [x, y] = [2 * uniform() - 1, 2 * uniform() - 1];
      const square = x * x + y * y;
      if (square >= 1) continue;
      const factor = Math.sqrt((-2 * Math.log(square)) / square);
      spare = y * factor;
      return x * factor;
    }
  };
}

export interface Design {
  readonly name: string;
  readonly between: boolean;
  /** Group sizes, or four times the number of subjects. */
  readonly sizes: readonly number[];
  readonly spreads: readonly number[];
  /** Pooled error, or each comparison its own. */
  readonly pooled: boolean;
}

export const designs: readonly Design[] = [
  { name: "balanced", between: true, sizes: [8, 8, 8, 8], spreads: [1, 1, 1, 1], pooled: true },
  { name: "unbalanced", between: true, sizes: [5, 7, 10, 18], spreads: [1, 1, 1, 1], pooled: true },
  { name: "unequal variances", between: true, sizes: [7, 9, 12, 16], spreads: [3, 2, 1.5, 1], pooled: false },
  { name: "within", between: false, sizes: [12, 12, 12, 12], spreads: [1, 1.5, 2, 3], pooled: false },
];

/** Lower triangle by rows: conditions close in time resemble each other more, so sphericity does not hold. */
const withinMixing = [[1], [0.8, 0.6], [0.5, 0.5, Math.sqrt(0.5)], [0.2, 0.4, 0.6, Math.sqrt(0.44)]];

/** Estimates of contrasts, their standard errors, df, and correlation where it is the study's own. */
export interface Estimates {
  readonly estimates: readonly number[];
  readonly standardErrors: readonly number[];
  readonly df: readonly number[];
  readonly correlation: readonly (readonly number[])[];
}

/** Raw values, a row per group; within subjects column s of every row is subject s. */
export function simulate(design: Design, means: readonly number[], normal: () => number): Float64Array[] {
  const values = design.sizes.map((size) => new Float64Array(size));
  if (design.between) {
    for (const [g, row] of values.entries())
      for (let i = 0; i < row.length; i++) row[i] = means[g]! + design.spreads[g]! * normal();
    return values;
  }
  for (let s = 0; s < design.sizes[0]!; s++) {
    const own = [normal(), normal(), normal(), normal()];
    for (const [g, mix] of withinMixing.entries())
      values[g]![s] = means[g]! + design.spreads[g]! * mix.reduce((sum, share, k) => sum + share * own[k]!, 0);
  }
  return values;
}

const meanOf = (row: Float64Array) => row.reduce((a, b) => a + b, 0) / row.length;

/** Estimates of contrasts (rows of weights over the four means), as the models room's document says for each design. */
export function estimate(
  design: Design,
  values: readonly Float64Array[],
  weights: readonly (readonly number[])[],
): Estimates {
  const averages = values.map(meanOf);
  const estimates = weights.map((row) => row.reduce((sum, w, g) => sum + w * averages[g]!, 0));
  let covariance: number[][];
  let df: number[];
  if (design.between) {
    const squares = values.map((row, g) => row.reduce((sum, y) => sum + (y - averages[g]!) ** 2, 0));
    const groupDf = design.sizes.map((n) => n - 1);
    const pooledDf = groupDf.reduce((a, b) => a + b, 0);
    const pooled = squares.reduce((a, b) => a + b, 0) / pooledDf;
    const variances = design.sizes.map((n, g) => (design.pooled ? pooled : squares[g]! / groupDf[g]!) / n);
    covariance = weights.map((a) => weights.map((b) => a.reduce((sum, w, g) => sum + w * b[g]! * variances[g]!, 0)));
    df = weights.map((row, i) =>
      design.pooled
        ? pooledDf
        : covariance[i]![i]! ** 2 / row.reduce((sum, w, g) => sum + (w * w * variances[g]!) ** 2 / groupDf[g]!, 0),
    );
  } else {
    const n = design.sizes[0]!;
    const scores = weights.map((row) =>
      Array.from({ length: n }, (_, s) => row.reduce((sum, w, g) => sum + w * values[g]![s]!, 0)),
    );
    covariance = scores.map((a, i) =>
      scores.map(
        (b, j) => a.reduce((sum, x, s) => sum + (x - estimates[i]!) * (b[s]! - estimates[j]!), 0) / (n - 1) / n,
      ),
    );
    df = weights.map(() => n - 1);
  }
  return {
    estimates,
    standardErrors: covariance.map((row, i) => Math.sqrt(row[i]!)),
    df,
    correlation: covariance.map((row, i) =>
      row.map((value, j) => (i === j ? 1 : value / Math.sqrt(covariance[i]![i]! * covariance[j]![j]!))),
    ),
  };
}

/**
 * Statistics of independent groups with pooled error when the labels are rearranged over all values: only the group sums change, the total
 * sum of squares does not. `into` takes one statistic for each row of weights.
 */
export function rearrangedStatistics(
  design: Design,
  values: readonly Float64Array[],
  weights: readonly (readonly number[])[],
  uniform: () => number,
): (into: Float64Array) => void {
  const all = Float64Array.from(values.flatMap((row) => [...row]));
  const grand = meanOf(all);
  const total = all.reduce((sum, y) => sum + (y - grand) ** 2, 0);
  const df = all.length - design.sizes.length;
  const lengths = weights.map((row) => row.reduce((sum, w, g) => sum + (w * w) / design.sizes[g]!, 0));
  const averages = new Float64Array(design.sizes.length);
  return (into) => {
    for (let k = all.length - 1; k > 0; k--) {
      const j = Math.floor(uniform() * (k + 1));
      const kept = all[k]!;
      all[k] = all[j]!;
      all[j] = kept;
    }
    let place = 0;
    let between = 0;
    for (const [g, size] of design.sizes.entries()) {
      let sum = 0;
      for (let i = 0; i < size; i++) sum += all[place++]! - grand;
      averages[g] = sum / size;
      between += (sum * sum) / size;
    }
    const meanSquare = (total - between) / df;
    for (const [i, row] of weights.entries()) {
      let value = 0;
      for (let g = 0; g < row.length; g++) value += row[g]! * averages[g]!;
      into[i] = value / Math.sqrt(meanSquare * lengths[i]!);
    }
  };
}

/** Own p of estimates against `truth`. */
export function ownP(it: Estimates, sides: "two-sided" | "upper", truth: readonly number[]): number[] {
  return it.estimates.map((value, i) => {
    const t = (value - truth[i]!) / it.standardErrors[i]!;
    return sides === "upper" ? tUpperTail(t, it.df[i]!) : tTwoSidedTail(t, it.df[i]!);
  });
}
