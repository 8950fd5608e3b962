/** Minimum of a smooth function of several variables, with bounds and with convergence that is verified, not assumed. */
import { choleskyFactor, choleskySolve } from "./dense-linear-algebra.ts";
import { DomainError } from "./domain-error.ts";

export interface Minimum {
  readonly x: readonly number[];
  readonly value: number;
  readonly gradient: readonly number[];
  /** True when the projected gradient is within the tolerance and no nearby step lowers the value beyond rounding. */
  readonly converged: boolean;
  readonly iterations: number;
  readonly evaluations: number;
  /** Variables that ended at a bound which the function pushes against. */
  readonly atBound: readonly number[];
}

export interface MinimizeOptions {
  /** The function; may answer Infinity where it is not defined. */
  readonly value: (x: readonly number[]) => number;
  /** Its gradient; when missing, fourth-order central differences (one-sided at a bound). */
  readonly gradient?: (x: readonly number[]) => readonly number[];
  readonly start: readonly number[];
  /** One per variable; -Infinity when not given. */
  readonly lower?: readonly number[];
  /** One per variable; Infinity when not given. */
  readonly upper?: readonly number[];
  /** Allowed projected gradient, relative to max(1, |value|) / max(1, |x_i|); 1e-8 when not given (1e-6 without a gradient). */
  readonly tolerance?: number;
  readonly maximumIterations?: number;
}

/**
 * Quasi-Newton minimisation with bounds: damped BFGS matrix, Newton step in the variables that are free, projected line search.
 *
 * Stops only when the gradient of the free variables vanishes to the tolerance; when the line search cannot go down before that, the
 * matrix is forgotten once and the search starts again along the gradient. What then remains is reported as not converged.
 *
 * @throws DomainError when sizes do not fit, a bound is reversed, or the function is not finite at the start
 * @source Nocedal & Wright (2006), Numerical Optimization, 6.1, 16.7, 18.3 (damping: Powell 1978); projected search: Bertsekas (1982)
 */
export function minimize(options: MinimizeOptions): Minimum {
  const { value: f, start, maximumIterations = 500 } = options;
  const size = start.length;
  const lower = options.lower ?? new Array<number>(size).fill(-Infinity);
  const upper = options.upper ?? new Array<number>(size).fill(Infinity);
  if (lower.length !== size || upper.length !== size)
    throw new DomainError("lower, upper", `${lower.length}, ${upper.length} values`, `${size} values`);
  for (let i = 0; i < size; i++)
    if (!(lower[i]! <= upper[i]!)) throw new DomainError("lower", lower[i], `<= upper, ${upper[i]}`);
  const tolerance = options.tolerance ?? (options.gradient === undefined ? 1e-6 : 1e-8);
  let evaluations = 0;
  const evaluate = (x: readonly number[]): number => {
    evaluations++;
    const found = f(x);
    return Number.isNaN(found) ? Infinity : found;
  };
  const slope = options.gradient ?? ((x: readonly number[]) => differences(evaluate, x, lower, upper));
  const clamp = (value: number, i: number) => Math.min(upper[i]!, Math.max(lower[i]!, value));
  let x = start.map(clamp);
  let value = evaluate(x);
  if (!Number.isFinite(value)) throw new DomainError("start", `value ${value}`, "a point where the function is finite");
  let gradient = slope(x);
  let hessian: number[][] = identity(size);
  let fresh = true;
  let stalled = false;
  let iterations = 0;
  const pushes = (i: number) => (x[i]! <= lower[i]! && gradient[i]! >= 0) || (x[i]! >= upper[i]! && gradient[i]! <= 0);
  const remaining = () => {
    let largest = 0;
    for (let i = 0; i < size; i++) {
      if (!pushes(i))
        largest = Math.max(
          largest,
          (Math.abs(gradient[i]!) * Math.max(1, Math.abs(x[i]!))) / Math.max(1, Math.abs(value)),
        );
    }
    return largest;
  };
  for (; iterations < maximumIterations && remaining() > tolerance; iterations++) {
    const free: number[] = [];
    for (let i = 0; i < size; i++) if (!pushes(i)) free.push(i);
    const reduced = free.map((i) => free.map((j) => hessian[i]![j]!));
    const step = choleskySolve(
      choleskyFactor(reduced),
      free.map((i) => -gradient[i]!),
    );
    // along the bend of the bounds: each trial point is clamped
    let length = fresh ? Math.min(1, 1 / Math.max(...step.map(Math.abs))) : 1;
    let next = x;
    let nextValue = value;
    let found = false;
    for (let trial = 0; trial < 60; trial++) {
      const point = [...x];
      for (let k = 0; k < free.length; k++) point[free[k]!] = clamp(x[free[k]!]! + length * step[k]!, free[k]!);
      let promised = 0;
      for (let i = 0; i < size; i++) promised += gradient[i]! * (point[i]! - x[i]!);
      const trialValue = evaluate(point);
      if (trialValue <= value + 1e-4 * promised && (trialValue < value || promised < 0)) {
        next = point;
        nextValue = trialValue;
        found = trialValue < value || point.some((entry, i) => entry !== x[i]);
        break;
      }
      // parabola through value, slope and trial, kept within a tenth and a half
      const bend = trialValue - value - promised;
      const best = bend > 0 && Number.isFinite(bend) ? (-promised / (2 * bend)) * length : length / 2;
      length = Math.min(length / 2, Math.max(length / 10, best));
    }
    if (!found) {
      if (fresh || stalled) break;
      hessian = identity(size);
      fresh = true;
      stalled = true;
      continue;
    }
    const nextGradient = slope(next);
    const s = next.map((entry, i) => entry - x[i]!);
    const y = nextGradient.map((entry, i) => entry - gradient[i]!);
    hessian = updated(hessian, s, y, fresh);
    if (nextValue < value) stalled = false;
    fresh = false;
    x = next;
    value = nextValue;
    gradient = nextGradient;
  }
  const atBound: number[] = [];
  for (let i = 0; i < size; i++) if (pushes(i)) atBound.push(i);
  return { x, value, gradient, converged: remaining() <= tolerance, iterations, evaluations, atBound };
}

function identity(size: number): number[][] {
  return Array.from({ length: size }, (_, i) => Array.from({ length: size }, (__, j) => (i === j ? 1 : 0)));
}

/** BFGS update of the Hessian, damped so that it stays positive definite; the first one also takes the scale of the function. */
function updated(before: number[][], s: readonly number[], y: readonly number[], first: boolean): number[][] {
  const size = s.length;
  let sy = 0;
  let yy = 0;
  let ss = 0;
  for (let i = 0; i < size; i++) {
    sy += s[i]! * y[i]!;
    yy += y[i]! * y[i]!;
    ss += s[i]! * s[i]!;
  }
  let hessian = before;
  if (ss === 0) return hessian;
  if (first && sy > 1e-12 * Math.sqrt(ss * yy))
    hessian = identity(size).map((row) => row.map((entry) => (entry * yy) / sy));
  const hs = hessian.map((row) => row.reduce((sum, entry, j) => sum + entry * s[j]!, 0));
  let shs = 0;
  for (let i = 0; i < size; i++) shs += s[i]! * hs[i]!;
  const share = sy >= 0.2 * shs ? 1 : (0.8 * shs) / (shs - sy);
  const r = y.map((entry, i) => share * entry + (1 - share) * hs[i]!);
  let sr = 0;
  for (let i = 0; i < size; i++) sr += s[i]! * r[i]!;
  if (!(sr > 0) || !(shs > 0)) return hessian;
  return hessian.map((row, i) => row.map((entry, j) => entry - (hs[i]! * hs[j]!) / shs + (r[i]! * r[j]!) / sr));
}

function differences(
  f: (x: readonly number[]) => number,
  x: readonly number[],
  lower: readonly number[],
  upper: readonly number[],
): number[] {
  const at = (i: number, value: number) => f(x.map((entry, j) => (j === i ? value : entry)));
  return x.map((entry, i) => {
    const step = 2e-4 * Math.max(1, Math.abs(entry));
    if (entry - 2 * step >= lower[i]! && entry + 2 * step <= upper[i]!) {
      return (
        (8 * (at(i, entry + step) - at(i, entry - step)) - (at(i, entry + 2 * step) - at(i, entry - 2 * step))) /
        (12 * step)
      );
    }
    // third order, into the allowed side
    const h = entry - 2 * step >= lower[i]! || upper[i]! - entry < entry - lower[i]! ? -step : step;
    return (-11 * f(x) + 18 * at(i, entry + h) - 9 * at(i, entry + 2 * h) + 2 * at(i, entry + 3 * h)) / (6 * h);
  });
}
