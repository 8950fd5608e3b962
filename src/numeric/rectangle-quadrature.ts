/** Rectangle probabilities by deterministic quadrature where the structure allows it. */
import { type Matrix, semidefiniteFactor } from "./dense-linear-algebra.ts";
import { stirlingError } from "./gamma-function.ts";
import { gaussLegendre } from "./integrate.ts";
import { normalDensity, normalLowerTail, normalUpperTail } from "./normal.ts";
import { productLoadings } from "./product-structure.ts";
import type { Rectangle } from "./rectangle-lattice.ts";

const reach = 8.6; // beyond it a normal variable has 1e-17
const rule = gaussLegendre(20);

/** P(low < Z < high), on the side of the smaller tails. */
function between(low: number, high: number): number {
  if (!(low < high)) return 0;
  return low > 0 ? normalUpperTail(low) - normalUpperTail(high) : normalLowerTail(high) - normalLowerTail(low);
}

/** Integral of a function times the normal density over [low, high], by panels no longer than `panel`. */
function normalMean(f: (z: number) => number, low: number, high: number, panel: number): number {
  const from = Math.max(low, -reach);
  const to = Math.min(high, reach);
  if (!(from < to)) return 0;
  const panels = Math.max(1, Math.ceil((to - from) / panel));
  const half = (to - from) / (2 * panels);
  let sum = 0;
  for (let p = 0; p < panels; p++) {
    const middle = from + (2 * p + 1) * half;
    for (let i = 0; i < 20; i++) {
      const z = middle + half * rule.nodes[i]!;
      sum += rule.weights[i]! * normalDensity(z) * f(z);
    }
  }
  return sum * half;
}

/** Nodes of the trapezoidal rule for S = sqrt(chi-square / df) in log S, down to 1e-17 of the density. */
function deviationNodes(df: number, sharpness: number): { s: number; weight: number }[] {
  if (df > 1e10) return [{ s: 1, weight: 1 }];
  const step = Math.min(0.9 / Math.sqrt(62 + 4.6 * df), 0.5 / (3 + sharpness));
  const factor = step * Math.sqrt(df / Math.PI) * Math.exp(-stirlingError(df / 2));
  const nodes: { s: number; weight: number }[] = [];
  for (const direction of [1, -1]) {
    for (let k = direction > 0 ? 0 : 1; ; k++) {
      const t = direction * k * step;
      const weight = factor * Math.exp(df * (t - Math.expm1(2 * t) / 2));
      if (weight < 1e-18 * factor) break;
      nodes.push({ s: Math.exp(t), weight });
    }
  }
  return nodes;
}

/** P of the rectangle at one deviation. */
type AtDeviation = (low: Float64Array, high: Float64Array) => number;

/**
 * The probability for one variable, product correlations, rank 2 and three variables; null for others.
 * Accuracy 1e-10 absolute, held against closed forms and the other routes in the tests.
 */
export function rectangleByQuadrature(
  rectangle: Rectangle,
): { probability: number; method: "one variable" | "product correlation, quadrature" | "quadrature" } | null {
  const { lower, upper, shift, correlation, df } = rectangle;
  const count = lower.length;
  let sharpness = 1;
  for (const list of [lower, upper])
    for (const value of list) if (Number.isFinite(value)) sharpness = Math.max(sharpness, Math.abs(value));
  let at: AtDeviation;
  let method: "one variable" | "product correlation, quadrature" | "quadrature" = "quadrature";
  const loadings = count === 1 ? [0] : productLoadings(correlation);
  if (count === 1) {
    at = (low, high) => between(low[0]!, high[0]!);
    method = "one variable";
  } else if (loadings !== null && Math.max(...loadings.map(Math.abs)) < 0.99995) {
    at = productRectangle(loadings);
    const own = Math.sqrt(1 - Math.max(...loadings.map((value) => value * value)));
    sharpness /= own;
    method = "product correlation, quadrature";
  } else {
    const { factor, rank } = semidefiniteFactor(correlation, 1e-11);
    if (rank === 1) at = sameVariable(factor);
    else if (rank === 2) at = planeRectangle(factor);
    else if (count === 3 && rank === 3 && conditionalDeviation(correlation) > 0.02) at = threeVariables(correlation);
    else return null;
  }
  const low = new Float64Array(count);
  const high = new Float64Array(count);
  let sum = 0;
  for (const { s, weight } of deviationNodes(df, sharpness)) {
    for (let i = 0; i < count; i++) {
      low[i] = lower[i]! * s - shift[i]!;
      high[i] = upper[i]! * s - shift[i]!;
    }
    sum += weight * at(low, high);
  }
  return { probability: sum, method };
}

function productRectangle(loadings: readonly number[]): AtDeviation {
  const own = loadings.map((loading) => Math.sqrt((1 - loading) * (1 + loading)));
  const panel = 3 * Math.min(1, Math.min(...own) * 1.2);
  return (low, high) =>
    normalMean(
      (z) => {
        let product = 1;
        for (let i = 0; i < own.length && product > 0; i++) {
          const centre = loadings[i]! * z;
          product *= between((low[i]! - centre) / own[i]!, (high[i]! - centre) / own[i]!);
        }
        return product;
      },
      -reach,
      reach,
      panel,
    );
}

/** All variables are one, up to their sign. */
function sameVariable(factor: Matrix): AtDeviation {
  return (low, high) => {
    let from = -Infinity;
    let to = Infinity;
    for (const [i, row] of factor.entries()) {
      const sign = row[0]!;
      from = Math.max(from, (sign > 0 ? low[i]! : high[i]!) / sign);
      to = Math.min(to, (sign > 0 ? high[i]! : low[i]!) / sign);
    }
    return between(from, to);
  };
}

/**
 * Strips across a plane: the inner integral is closed, its limits are broken lines; the outer one runs between the corners of the polygon.
 */
function planeRectangle(factor: Matrix): AtDeviation {
  return (low, high) => {
    // half-planes a x + b y <= c
    const sides: [number, number, number][] = [];
    for (const [i, row] of factor.entries()) {
      if (Number.isFinite(high[i])) sides.push([row[0]!, row[1]!, high[i]!]);
      if (Number.isFinite(low[i])) sides.push([-row[0]!, -row[1]!, -low[i]!]);
    }
    let corners: [number, number][] = [
      [-reach, -reach],
      [reach, -reach],
      [reach, reach],
      [-reach, reach],
    ];
    for (const [a, b, c] of sides) {
      const kept: [number, number][] = [];
      for (const [k, p] of corners.entries()) {
        const q = corners[(k + 1) % corners.length]!;
        const dp = c - a * p[0] - b * p[1];
        const dq = c - a * q[0] - b * q[1];
        if (dp >= 0) kept.push(p);
        if (dp >= 0 !== dq >= 0) {
          const t = dp / (dp - dq);
          kept.push([p[0] + t * (q[0] - p[0]), p[1] + t * (q[1] - p[1])]);
        }
      }
      corners = kept;
      if (corners.length === 0) return 0;
    }
    const breaks = [...new Set(corners.map((corner) => corner[0]))].sort((x, y) => x - y);
    const slice = (x: number): number => {
      let from = -Infinity;
      let to = Infinity;
      for (const [a, b, c] of sides) {
        const rest = c - a * x;
        if (b > 1e-14) to = Math.min(to, rest / b);
        else if (b < -1e-14) from = Math.max(from, rest / b);
      }
      return between(from, to);
    };
    let steepest = 1;
    for (const [a, b] of sides) if (Math.abs(b) > 1e-14) steepest = Math.max(steepest, Math.hypot(a, b) / Math.abs(b));
    let sum = 0;
    for (let k = 0; k + 1 < breaks.length; k++)
      sum += normalMean(slice, breaks[k]!, breaks[k + 1]!, Math.max(0.05, 3 / steepest));
    return sum;
  };
}

/** Smallest deviation of a variable given the two others. */
function conditionalDeviation(correlation: Matrix): number {
  const [r12, r13, r23] = [correlation[0]![1]!, correlation[0]![2]!, correlation[1]![2]!];
  const determinant = 1 - r12 * r12 - r13 * r13 - r23 * r23 + 2 * r12 * r13 * r23;
  let least = 1;
  for (const r of [r12, r13, r23])
    least = Math.min(least, Math.sqrt(Math.max(0, determinant) / Math.max(1e-300, 1 - r * r)), Math.sqrt(1 - r * r));
  return least;
}

/** Three variables, the two last given the first, the last given both in closed form. */
function threeVariables(correlation: Matrix): AtDeviation {
  const [r12, r13, r23] = [correlation[0]![1]!, correlation[0]![2]!, correlation[1]![2]!];
  const own2 = Math.sqrt(1 - r12 * r12);
  const slope = (r23 - r12 * r13) / own2;
  const own3 = Math.sqrt(Math.max(0, 1 - r13 * r13 - slope * slope));
  const least = conditionalDeviation(correlation);
  const panel = 3 * Math.min(1, 1.2 * least);
  return (low, high) =>
    normalMean(
      (x) =>
        normalMean(
          (y) => {
            const centre = r13 * x + slope * y;
            return between((low[2]! - centre) / own3, (high[2]! - centre) / own3);
          },
          (low[1]! - r12 * x) / own2,
          (high[1]! - r12 * x) / own2,
          panel,
        ),
      low[0]!,
      high[0]!,
      panel,
    );
}
