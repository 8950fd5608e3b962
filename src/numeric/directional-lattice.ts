/** Joint tails by directions beyond three dimensions: directions drawn where the tail is, on a lattice. */
import type { Watch } from "../host/index.ts";
import { DomainError } from "./domain-error.ts";
import { type HalfSpaces, lengthTail } from "./directional-tail.ts";
import { latticeMean } from "./lattice.ts";
import { normalQuantile } from "./normal.ts";

export interface DirectionalTask {
  /** rows . x >= 1, every row longer than 0. */
  readonly rows: HalfSpaces;
  readonly rank: number;
  readonly df: number;
  readonly seed: number;
  /** The absolute error asked of about this probability. */
  readonly allowedError: (probability: number) => number;
  readonly mostEvaluations: number;
  readonly watch?: Watch | undefined;
}

/** What was drawn, enough to have the tail at other common limits: P(limits times c) = mean of weight tail(c / nearest). */
export interface DirectionalSample {
  readonly probability: number;
  /** 4 standard errors over the lattice shifts. */
  readonly error: number;
  /** Largest row along each direction. */
  readonly largest: Float64Array;
  readonly weights: Float64Array;
}

/**
 * P(x in the union of half-spaces): directions are drawn from the mixture of the conditional distributions given that one half-space is reached,
 * and weighted by the largest of the rows' tails over their sum. The weight lies between 1 / rows and 1, so that the relative error is bounded
 * however small the tail, and vanishes with it (overlaps become rare). The largest tail, not its indicator, keeps the integrand continuous.
 *
 * Given row j, the cosine x between direction and row has density proportional to (1 - x^2)^((rank - 3) / 2) tail(1 / (size x)), by its tabulated
 * inverse, and the rest of the direction is uniform.
 *
 * @source importance sampling of unions: Adler, Blanchet & Liu (2012), Annals of Applied Probability 22, 1167-1214; balance heuristic: Veach & Guibas (1995)
 */
export function unionTailByLattice(task: DirectionalTask, keep = false): DirectionalSample {
  const { rows, rank, df } = task;
  const count = rows.length;
  const flat = new Float64Array(count * rank);
  const sizes = new Float64Array(count);
  for (const [i, row] of rows.entries()) {
    for (let k = 0; k < rank; k++) flat[i * rank + k] = row[k]!;
    sizes[i] = Math.hypot(...row);
    if (!(sizes[i]! > 0)) throw new DomainError("rows", row, "rows longer than 0");
  }
  const tail = lengthTail(rank, df);
  const tables = new Map<number, CosineTable>();
  const tableOf = (size: number): CosineTable => {
    let table = tables.get(size);
    if (table === undefined) {
      table = cosineTable(tail, rank, size);
      tables.set(size, table);
    }
    return table;
  };
  const longest = Math.max(...sizes);
  const along = tabulatedTail(tail, longest);
  const own = [...sizes].map(tableOf);
  // a row is drawn in proportion to the probability of its half-space
  const cumulative = new Float64Array(count + 1);
  for (let i = 0; i < count; i++) cumulative[i + 1] = cumulative[i]! + own[i]!.probability;
  const total = cumulative[count]!;
  const direction = new Float64Array(rank);
  // reflections that take the first axis to a row: along the difference of the two, scaled to length sqrt(2)
  const mirrors = new Float64Array(count * rank);
  for (let i = 0; i < count; i++) {
    const at = i * rank;
    let square = 0;
    for (let k = 0; k < rank; k++) {
      const value = flat[at + k]! / sizes[i]! - (k === 0 ? 1 : 0);
      mirrors[at + k] = value;
      square += value * value;
    }
    const scale = square > 1e-30 ? Math.SQRT2 / Math.sqrt(square) : 0;
    for (let k = 0; k < rank; k++) mirrors[at + k]! *= scale;
  }
  const largest: number[] = [];
  const weights: number[] = [];
  const integrand = (point: Float64Array): number => {
    const target = point[0]! * total;
    let low = 0;
    let high = count;
    while (high - low > 1) {
      const middle = (low + high) >> 1;
      if (cumulative[middle]! <= target) low = middle;
      else high = middle;
    }
    const j = low;
    const x = own[j]!.cosine(point[1]!);
    // drawn around the first axis, then reflected onto the row
    let square = 0;
    for (let k = 1; k < rank; k++) {
      const value = normalQuantile(point[k + 1]!);
      direction[k] = value;
      square += value * value;
    }
    const scale = Math.sqrt(((1 - x) * (1 + x)) / square);
    const at = j * rank;
    direction[0] = x;
    let product = x * mirrors[at]!;
    for (let k = 1; k < rank; k++) {
      direction[k]! *= scale;
      product += direction[k]! * mirrors[at + k]!;
    }
    for (let k = 0; k < rank; k++) direction[k]! -= product * mirrors[at + k]!;
    let best = 0;
    let sum = 0;
    for (let i = 0; i < count; i++) {
      let length = 0;
      for (let k = 0, place = i * rank; k < rank; k++) length += flat[place + k]! * direction[k]!;
      if (length > 0) {
        sum += along(length);
        if (length > best) best = length;
      }
    }
    const reached = along(best);
    const value = sum > 0 ? reached / sum : 1;
    if (keep) {
      largest.push(best);
      weights.push(total / sum);
    }
    return value;
  };
  const mean = latticeMean({
    dimensions: rank + 1,
    integrand,
    seed: task.seed,
    restart: () => {
      largest.length = 0;
      weights.length = 0;
    },
    allowedError: (value) => task.allowedError(value * total) / total,
    mostEvaluations: task.mostEvaluations,
    watch: task.watch,
  });
  return {
    probability: mean.value * total,
    error: mean.error * total,
    largest: Float64Array.from(largest),
    weights: Float64Array.from(weights),
  };
}

interface CosineTable {
  /** Probability of the half-space. */
  readonly probability: number;
  /** Inverse distribution function of the cosine. */
  cosine(u: number): number;
}

/** Over the angle from the row, whose density is sin^(rank - 2) tail(1 / (size cos)), by cells with a quadratic density each. */
function cosineTable(tail: (length: number) => number, rank: number, size: number): CosineTable {
  const cells = 512;
  const density = (angle: number): number => {
    const x = Math.cos(angle);
    return x > 0 ? Math.sin(angle) ** (rank - 2) * tail(1 / (size * x)) : 0;
  };
  // the part of the quarter circle that holds all but 1e-18
  let end = Math.PI / 2;
  let sum = 0;
  for (let i = 1; i <= 200; i++) {
    const value = density((i * Math.PI) / 400);
    sum += value;
    if (sum > 0 && value < 1e-19 * sum) {
      end = (i * Math.PI) / 400;
      break;
    }
  }
  const step = end / cells;
  const densities = new Float64Array(2 * cells + 1);
  for (let i = 0; i <= 2 * cells; i++) densities[i] = density((i * step) / 2);
  const cumulative = new Float64Array(cells + 1);
  for (let i = 0; i < cells; i++) {
    cumulative[i + 1] =
      cumulative[i]! + (step / 6) * (densities[2 * i]! + 4 * densities[2 * i + 1]! + densities[2 * i + 2]!);
  }
  const whole = cumulative[cells]!;
  // the density of an angle before the tail: Gamma(rank / 2) / (sqrt(pi) Gamma((rank - 1) / 2))
  let area = rank % 2 === 0 ? 1 / Math.PI : 0.5;
  for (let k = rank % 2 === 0 ? 2 : 3; k < rank; k += 2) area *= k / (k - 1);
  return {
    probability: area * whole,
    cosine(u) {
      const target = u * whole;
      let low = 0;
      let high = cells;
      while (high - low > 1) {
        const middle = (low + high) >> 1;
        if (cumulative[middle]! <= target) low = middle;
        else high = middle;
      }
      const a = densities[2 * low]!;
      const b = 4 * densities[2 * low + 1]! - 3 * a - densities[2 * low + 2]!;
      const c = 2 * (a + densities[2 * low + 2]!) - 4 * densities[2 * low + 1]!;
      const rest = (target - cumulative[low]!) / step;
      let t = (target - cumulative[low]!) / (cumulative[low + 1]! - cumulative[low]!);
      for (let iteration = 0; iteration < 4; iteration++) {
        const slope = a + t * (b + t * c);
        if (!(slope > 0)) break;
        const change = (t * (a + t * (b / 2 + (t * c) / 3)) - rest) / slope;
        t = Math.min(1, Math.max(0, t - change));
        if (Math.abs(change) < 1e-9) break;
      }
      return Math.cos((low + t) * step);
    },
  };
}

/** The length tail at 1 / along for 0 < along <= longest, by cubics through four neighbours. */
function tabulatedTail(tail: (length: number) => number, longest: number): (along: number) => number {
  const cells = 4096;
  const values = new Float64Array(cells + 4);
  for (let i = 0; i < cells + 4; i++) {
    const along = ((i - 1) * longest) / cells;
    values[i] = along > 0 ? tail(1 / along) : 0;
  }
  const factor = cells / longest;
  return (along) => {
    const place = along * factor;
    let index = Math.floor(place);
    if (index > cells) index = cells;
    const t = place - index;
    const a = values[index]!;
    const b = values[index + 1]!;
    const c = values[index + 2]!;
    const d = values[index + 3]!;
    const value = b + t * (c - a / 3 - b / 2 - d / 6 + t * ((a + c) / 2 - b + t * ((d - a) / 6 + (b - c) / 2)));
    return Math.max(value, 0);
  };
}
