/** Quadrature of one variable for functions of any sign. */
import { DomainError } from "./domain-error.ts";

export interface Integral {
  readonly value: number;
  /** Estimate of the absolute error. */
  readonly error: number;
  readonly converged: boolean;
}

export interface QuadratureNodes {
  readonly nodes: Float64Array;
  readonly weights: Float64Array;
}

/**
 * Nodes and weights of Gauss-Legendre quadrature on [-1, 1], by Newton's method on the polynomial.
 * @param count 1 to 10,000
 * @source DLMF 3.5(v), 18.9
 */
export function gaussLegendre(count: number): QuadratureNodes {
  if (!(Number.isInteger(count) && count >= 1 && count <= 10000))
    throw new DomainError("count", count, "a whole number from 1 to 10,000");
  const nodes = new Float64Array(count);
  const weights = new Float64Array(count);
  for (let i = 0; i < (count + 1) >> 1; i++) {
    let x = Math.cos((Math.PI * (i + 0.75)) / (count + 0.5));
    let slope = 0;
    for (let iteration = 0; iteration < 20; iteration++) {
      let before = 1;
      let value = x;
      for (let degree = 2; degree <= count; degree++) {
        const next = ((2 * degree - 1) * x * value - (degree - 1) * before) / degree;
        before = value;
        value = next;
      }
      slope = (count * (x * value - before)) / (x * x - 1);
      const step = value / slope;
      x -= step;
      if (Math.abs(step) < 1e-16) break;
    }
    if (2 * i + 1 === count) x = 0;
    // the slope once more at the final x: the weight depends on it squared
    let before = 1;
    let value = x;
    for (let degree = 2; degree <= count; degree++) {
      const next = ((2 * degree - 1) * x * value - (degree - 1) * before) / degree;
      before = value;
      value = next;
    }
    if (count === 1) before = 1;
    slope = (count * (x * value - before)) / (x * x - 1);
    nodes[i] = -x;
    nodes[count - 1 - i] = x;
    weights[i] = 2 / ((1 - x * x) * slope * slope);
    weights[count - 1 - i] = weights[i]!;
  }
  return { nodes, weights };
}

export interface IntegrateOptions {
  /** Asked relative error; 1e-12 when not given. */
  readonly relativeError?: number;
  /** Asked absolute error; 0 when not given. The looser of the two counts. */
  readonly absoluteError?: number;
}

/**
 * Integral of a function over an interval, finite or not, by the tanh-sinh rule (exp-sinh and sinh-sinh for infinite ends), its step halved
 * until two sums agree. Copes with integrable singularities at the ends; breaks inside should be ends of separate calls.
 *
 * @param integrand finite inside the interval
 * @param low lower end, -Infinity allowed
 * @param high upper end, Infinity allowed, >= low
 * @returns the value, the difference of the last two sums as error, and whether the asked error was met
 * @throws DomainError when an end is NaN or the ends are reversed
 * @source Takahasi & Mori (1974)
 */
export function integrate(
  integrand: (x: number) => number,
  low: number,
  high: number,
  options: IntegrateOptions = {},
): Integral {
  if (!(low <= high)) throw new DomainError("low", low, `<= high, ${high}`);
  if (low === high) return { value: 0, error: 0, converged: true };
  const { relativeError = 1e-12, absoluteError = 0 } = options;
  const half = Math.PI / 2;
  const finiteLow = Number.isFinite(low);
  const finiteHigh = Number.isFinite(high);
  const term = (t: number): number => {
    const s = half * Math.sinh(t);
    let x: number;
    let weight: number;
    if (finiteLow && finiteHigh) {
      // distance from the nearer end, so that points next to it keep their digits
      const e = Math.exp(-2 * Math.abs(s));
      const distance = ((high - low) * e) / (1 + e);
      x = s < 0 ? low + distance : high - distance;
      if (x <= low || x >= high) return 0;
      weight = ((high - low) * 2 * half * Math.cosh(t) * e) / (1 + e) ** 2;
    } else if (finiteLow || finiteHigh) {
      const e = Math.exp(s);
      x = finiteLow ? low + e : high - e;
      if (x === low || x === high) return 0;
      weight = half * Math.cosh(t) * e;
    } else {
      x = Math.sinh(s);
      weight = half * Math.cosh(t) * Math.cosh(s);
    }
    if (!(weight > 0) || weight === Infinity || !Number.isFinite(x)) return 0;
    const value = integrand(x);
    return value === 0 ? 0 : value * weight;
  };
  const reach = finiteLow && finiteHigh ? 4.5 : 6.5;
  let step = 0.5;
  let sum = term(0);
  for (let k = 1; k * step <= reach; k++) sum += term(k * step) + term(-k * step);
  let value = sum * step;
  let error = Infinity;
  for (let halving = 0; halving < 9; halving++) {
    step /= 2;
    for (let k = 1; k * step <= reach; k += 2) sum += term(k * step) + term(-k * step);
    const next = sum * step;
    error = Math.abs(next - value);
    value = next;
    // two halvings at least: the first sums can agree by chance
    if (halving >= 2 && error <= Math.max(absoluteError, relativeError * Math.abs(value)))
      return { value, error, converged: true };
  }
  return { value, error, converged: error <= Math.max(absoluteError, relativeError * Math.abs(value)) };
}
