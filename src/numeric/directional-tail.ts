/**
 * Joint tails by directions. A jointly normal or t vector of rank r is a direction, uniform on the sphere, times a length that does not know the
 * direction; in a direction the first limit is passed at one length, whose tail is a chi or F tail. No 1 - cdf anywhere, so that small
 * tails keep their digits. Deterministic on the circle and on the sphere in three dimensions.
 */
import { fUpperTail } from "./f.ts";
import { chiSquareUpperTail } from "./gamma.ts";
import { gammaRatioHalf } from "./gamma-ratio.ts";
import { integrateAdaptively } from "./kronrod-quadrature.ts";

/** Half-spaces direction . x >= 1, one row each: the rows of a factor of the correlation over their limits (all limits positive). */
export type HalfSpaces = readonly (readonly number[])[];

/** P(length >= value), where length^2 / rank is F with rank and df degrees of freedom. */
export function lengthTail(rank: number, df: number): (length: number) => number {
  if (df > 1e15) return (length) => (length === Infinity ? 0 : chiSquareUpperTail(length * length, rank));
  if (rank === 2) return (length) => Math.exp(-0.5 * df * Math.log1p((length * length) / df));
  return (length) => (length === Infinity ? 0 : fUpperTail((length * length) / rank, rank, df));
}

const quadratureTolerance = 1e-9; // of Kronrod less Gauss; the error of the Kronrod sum is far smaller

/**
 * P(x in the union of the half-spaces) for rank 2: the mean over the circle of the length tail at the nearest boundary, arc by arc.
 * The nearest boundary of an arc belongs to a corner of the convex hull of the rows; arcs meet at the normals of the hull's edges.
 */
export function unionTailOnCircle(rows: HalfSpaces, df: number): number {
  const tail = lengthTail(2, df);
  const hull = convexHull(rows);
  let sum = 0;
  for (const [k, corner] of hull.entries()) {
    const [x, y] = corner;
    const size = Math.hypot(x, y);
    const own = Math.atan2(y, x);
    const before = hull[(k + hull.length - 1) % hull.length]!;
    const after = hull[(k + 1) % hull.length]!;
    // the corner is nearest between the normals of its two edges, which need not enclose its own direction
    let from = own - Math.PI / 2;
    let to = own + Math.PI / 2;
    if (hull.length > 1) {
      let first = outward(before, corner);
      let last = outward(corner, after);
      while (last < first) last += 2 * Math.PI;
      // of all turns the one that meets the half circle where the corner's boundary is reached at all
      while (last <= from) {
        first += 2 * Math.PI;
        last += 2 * Math.PI;
      }
      while (first >= to) {
        first -= 2 * Math.PI;
        last -= 2 * Math.PI;
      }
      from = Math.max(from, first);
      to = Math.min(to, last);
    }
    if (!(to > from)) continue;
    const integrand = (angle: number): number => {
      const along = size * Math.cos(angle - own);
      return along > 0 ? tail(1 / along) : 0;
    };
    const breaks = [from, to];
    if (own > from && own < to) breaks.splice(1, 0, own);
    sum += integrateAdaptively(integrand, breaks, quadratureTolerance);
  }
  return sum / (2 * Math.PI);
}

type Point = readonly [number, number];

/** Normal of the edge from a to b of a counterclockwise hull, as an angle. */
function outward(a: Point, b: Point): number {
  return Math.atan2(-(b[0] - a[0]), b[1] - a[1]);
}

/** Corners of the convex hull, counterclockwise (Andrew 1979). */
function convexHull(rows: HalfSpaces): Point[] {
  const points = rows.map((row) => [row[0]!, row[1] ?? 0] as Point).sort((a, b) => a[0] - b[0] || a[1] - b[1]);
  const different = points.filter(
    (p, i) => i === 0 || Math.hypot(p[0] - points[i - 1]![0], p[1] - points[i - 1]![1]) > 1e-14,
  );
  if (different.length < 3) return different;
  const half = (list: readonly Point[]): Point[] => {
    const chain: Point[] = [];
    for (const p of list) {
      while (chain.length >= 2) {
        const [a, b] = [chain.at(-2)!, chain.at(-1)!];
        if ((b[0] - a[0]) * (p[1] - a[1]) - (b[1] - a[1]) * (p[0] - a[0]) > 0) break;
        chain.pop();
      }
      chain.push(p);
    }
    chain.pop();
    return chain;
  };
  return [...half(different), ...half([...different].reverse())];
}

/**
 * P(x in the union of the half-spaces) for rank 3.
 *
 * The plane of a row carries one face of the intersection of the complements; directions through the face meet that plane first. With the foot of
 * the perpendicular as centre, a face is a sum of triangles from the foot to its edges, signed where the foot lies outside; the part of a
 * triangle at one azimuth, from the perpendicular to slant x = cos(angle), is the integral of tail(d / x) dx, which has a closed form. What is
 * left is one smooth integral over the azimuth of each edge.
 */
export function unionTailOnSphere(rows: HalfSpaces, df: number): number {
  const tail = lengthTail(3, df);
  // density of the length over the length, integrated from r on: closed form
  const reciprocal =
    df > 1e15
      ? (r: number) => Math.sqrt(2 / Math.PI) * Math.exp(-0.5 * r * r)
      : (() => {
          // 4 pi Gamma((df + 3) / 2) / (Gamma(df / 2) (df pi)^(3/2)) df / (df + 1) = 2 Gamma((df + 1) / 2) / (Gamma(df / 2) sqrt(pi df))
          const constant = (2 / Math.sqrt(Math.PI)) * Math.SQRT1_2 * gammaRatioHalf(df);
          return (r: number) => constant * Math.exp(-0.5 * (df + 1) * Math.log1p((r * r) / df));
        })();
  let sum = 0;
  for (const [i, row] of rows.entries()) {
    const size = Math.hypot(row[0]!, row[1]!, row[2]!);
    const distance = 1 / size;
    const face = faceOf(rows, i, size);
    if (face === null) continue;
    const whole = tail(distance);
    const near = distance * reciprocal(distance);
    /** Integral of tail(distance / x) dx from the slant at radius rho on the plane to 1. */
    const cap = (rho: number): number => {
      const length = Math.hypot(distance, rho);
      const x = distance / length;
      return whole - x * tail(length) - (near - distance * reciprocal(length));
    };
    for (const [k, { at, line }] of face.entries()) {
      const next = face[(k + 1) % face.length]!.at;
      const [p, q, free] = line;
      const steepness = Math.hypot(p, q);
      // signed distance of the edge's line from the foot; positive when the foot lies inside
      const away = free / steepness;
      const gap = Math.abs(away);
      if (gap < 1e-15 * distance) continue;
      const from = Math.atan2(p * at[1] - q * at[0], gap * steepness);
      const to = Math.atan2(p * next[1] - q * next[0], gap * steepness);
      const breaks = from < 0 && to > 0 ? [from, 0, to] : [from, to];
      const part = integrateAdaptively(
        (angle) => cap(gap / Math.max(Math.cos(angle), 1e-300)),
        breaks,
        quadratureTolerance,
      );
      sum += away > 0 ? part : -part;
    }
  }
  return sum / (4 * Math.PI);
}

/** Corners of the face of row i on its plane, in coordinates around the foot, counterclockwise; null when the plane is behind others everywhere. */
function faceOf(rows: HalfSpaces, i: number, size: number): Corner[] | null {
  const own = rows[i]!;
  const normal = own.map((value) => value / size) as [number, number, number];
  // two directions in the plane
  const least = normal.map(Math.abs).indexOf(Math.min(...normal.map(Math.abs)));
  const helper = [0, 0, 0];
  helper[least] = 1;
  const first = unit(cross(normal, helper));
  const second = cross(normal, first);
  const distance = 1 / size;
  // a square so large that what lies beyond it counts nothing, even with 1 df
  const far = 1e10 * distance;
  const square: Line[] = [
    [0, -1, far],
    [1, 0, far],
    [0, 1, far],
    [-1, 0, far],
  ];
  let corners: Corner[] = square.map((line, k) => ({ line, at: meeting(square[(k + 3) % 4]!, line) }));
  for (const [j, row] of rows.entries()) {
    if (j === i) continue;
    // other . (distance normal + p first + q second) <= 1
    const p = dot(row, first);
    const q = dot(row, second);
    const free = 1 - distance * dot(row, normal);
    const steepness = Math.hypot(p, q);
    if (steepness < 1e-12 * size) {
      // parallel planes: the nearer one, of the same the first
      if (dot(row, normal) > 0 && (free < -1e-12 || (Math.abs(free) <= 1e-12 && j < i))) return null;
      continue;
    }
    corners = clipped(corners, [p, q, free]);
    if (corners.length < 3) return null;
  }
  return corners;
}

/** p x + q y <= free, as [p, q, free]. */
type Line = readonly [number, number, number];

/** A corner of a polygon, counterclockwise, with the line of the edge that starts there. */
interface Corner {
  readonly at: Point;
  readonly line: Line;
}

/** From the lines themselves: a point between two far corners would lose its digits. */
function meeting(a: Line, b: Line): Point {
  const determinant = a[0] * b[1] - a[1] * b[0];
  return [(a[2] * b[1] - a[1] * b[2]) / determinant, (a[0] * b[2] - a[2] * b[0]) / determinant];
}

/** The part of a convex polygon on the inner side of a line (Sutherland & Hodgman 1974). */
function clipped(corners: readonly Corner[], line: Line): Corner[] {
  const kept: Corner[] = [];
  const inside = ({ at }: Corner) => line[2] - line[0] * at[0] - line[1] * at[1] >= 0;
  for (const [k, corner] of corners.entries()) {
    const next = corners[(k + 1) % corners.length]!;
    if (inside(corner)) {
      kept.push(corner);
      // the new edge starts where this one leaves
      if (!inside(next)) kept.push({ at: meeting(corner.line, line), line });
    } else if (inside(next)) kept.push({ at: meeting(corner.line, line), line: corner.line });
  }
  return kept;
}

const dot = (a: readonly number[], b: readonly number[]) => a[0]! * b[0]! + a[1]! * b[1]! + a[2]! * b[2]!;
const cross = (a: readonly number[], b: readonly number[]): [number, number, number] => [
  a[1]! * b[2]! - a[2]! * b[1]!,
  a[2]! * b[0]! - a[0]! * b[2]!,
  a[0]! * b[1]! - a[1]! * b[0]!,
];
const unit = (a: [number, number, number]): [number, number, number] => {
  const size = Math.hypot(...a);
  return [a[0] / size, a[1] / size, a[2] / size];
};
